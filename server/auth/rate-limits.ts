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
  /** A PIN of four digits has ten thousand values: 5 wrong ones a quarter of an hour are 480 a day, and every day anew. */
  failedSignOnsOfAPerson: { limit: 5, windowMs: 15 * MINUTE_MS },
  failedSignOnsOfABench: { limit: 30, windowMs: 15 * MINUTE_MS },
  /** Whoever sits down at a browser that was left open must not find out the password. */
  failedPasswordChangesOfAPerson: { limit: 10, windowMs: 15 * MINUTE_MS },
  failedLinksOfAnAddress: { limit: 30, windowMs: 15 * MINUTE_MS },
  failedPinChangesOfAPerson: { limit: 10, windowMs: 15 * MINUTE_MS },
};

type Limit = (typeof LIMITS)[keyof typeof LIMITS];

function limiter(
  limit: Limit,
  keyOf: (request: Request) => string | Promise<string>,
  success?: (status: number, ours: boolean) => boolean,
): RequestHandler {
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
const benchOf = (request: Request): string => request.bench?.id ?? address(request);
const below400 = (status: number): boolean => status < 400;

export type RateLimits = Record<
  'signIn' | 'firstAdmin' | 'publicTag' | 'signOn' | 'ownPin' | 'ownPassword' | 'personLink',
  RequestHandler[]
>;

/**
 * One set a server: counts live in its memory. `signsOn` finds whom a sign-on is about, so that a name, an e-mail address and an id
 * count together, at every bench.
 */
export function rateLimits(signsOn: (body: unknown) => Promise<string>): RateLimits {
  return {
    signOn: [
      limiter(LIMITS.failedSignOnsOfABench, benchOf, below400),
      limiter(LIMITS.failedSignOnsOfAPerson, (request) => signsOn(request.body), below400),
    ],
    ownPassword: [limiter(LIMITS.failedPasswordChangesOfAPerson, (request) => request.user?.id ?? address(request), below400)],
    personLink: [limiter(LIMITS.failedLinksOfAnAddress, address, below400)],
    ownPin: [limiter(LIMITS.failedPinChangesOfAPerson, (request) => request.user?.id ?? address(request), below400)],
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
