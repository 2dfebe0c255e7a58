import { parse } from 'cookie';
import type { Request, Response } from 'express';
import { ownOrigin } from './origin.js';

export const SESSION_COOKIE = 'refettle_session';

export const sessionCookie = (request: Request): string | undefined => parse(request.headers.cookie ?? '')[SESSION_COOKIE];

const attributes = (request: Request, publicUrl: string | undefined) =>
  ({ httpOnly: true, sameSite: 'strict', path: '/', secure: ownOrigin(request, publicUrl).startsWith('https:') }) as const;

export function setSessionCookie(request: Request, response: Response, publicUrl: string | undefined, token: string, expires: Date): void {
  response.cookie(SESSION_COOKIE, token, { ...attributes(request, publicUrl), expires });
}

export function clearSessionCookie(request: Request, response: Response, publicUrl: string | undefined): void {
  response.clearCookie(SESSION_COOKIE, attributes(request, publicUrl));
}
