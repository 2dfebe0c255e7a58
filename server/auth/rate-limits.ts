import type { Request, RequestHandler } from 'express';
import { ipKeyGenerator, rateLimit } from 'express-rate-limit';
import { TooManyError } from '../errors.js';

const MINUTE_MS = 60_000;

/** Generous for a shop behind one address, hopeless for a guesser. */
const LIMITS = {
  failedSignInsOfAnAddress: { limit: 50, windowMs: 15 * MINUTE_MS },
  failedSignInsOfAnEmail: { limit: 10, windowMs: 15 * MINUTE_MS },
  firstAdminTriesOfAnAddress: { limit: 10, windowMs: 15 * MINUTE_MS },
  tagLookUpsOfAnAddress: { limit: 120, windowMs: MINUTE_MS },
  /** A look-up word has four characters: without this, many addresses together could try them all. */
  failedLookUpsOfATag: { limit: 30, windowMs: 15 * MINUTE_MS },
};

type Limit = (typeof LIMITS)[keyof typeof LIMITS];

function limiter(limit: Limit, keyOf: (request: Request) => string, success?: (status: number, ours: boolean) => boolean): RequestHandler {
  return rateLimit({
    ...limit,
    keyGenerator: keyOf,
    standardHeaders: 'draft-8',
    legacyHeaders: false,
    ...(success
      ? {
          skipSuccessfulRequests: true,
          requestWasSuccessful: (_request, response) => success(response.statusCode, response.locals['ours'] === true),
        }
      : {}),
    handler: (request, _response, next) => {
      const resetAt = (request as Request & { rateLimit?: { resetTime?: Date } }).rateLimit?.resetTime;
      const seconds = resetAt ? Math.ceil((resetAt.getTime() - Date.now()) / 1000) : limit.windowMs / 1000;
      next(new TooManyError(Math.max(1, seconds)));
    },
  });
}

const address = (request: Request): string => ipKeyGenerator(request.ip ?? 'unknown');
const emailOf = (request: Request): string => {
  const email = (request.body as { email?: unknown } | undefined)?.email;
  return typeof email === 'string' ? email.trim().toLowerCase().slice(0, 320) : '';
};
const below400 = (status: number): boolean => status < 400;

/** One set a server: counts live in its memory. */
export function rateLimits(): Record<'signIn' | 'firstAdmin' | 'publicTag', RequestHandler[]> {
  return {
    signIn: [limiter(LIMITS.failedSignInsOfAnAddress, address, below400), limiter(LIMITS.failedSignInsOfAnEmail, emailOf, below400)],
    firstAdmin: [limiter(LIMITS.firstAdminTriesOfAnAddress, address)],
    publicTag: [
      limiter(LIMITS.tagLookUpsOfAnAddress, address),
      limiter(
        LIMITS.failedLookUpsOfATag,
        (request) => String(request.params['tag']).toUpperCase().slice(0, 40),
        (_status, ours) => ours,
      ),
    ],
  };
}
