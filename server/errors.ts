// What the server refuses with. Translated to problem+json in problem.ts and nowhere else.
import { unitNumberText } from '../shared/unit-number.js';

export interface Fault {
  /** Into the request, by JSON pointer (RFC 6901). */
  pointer: string;
  reason: string;
}

export class NotSignedInError extends Error {
  override readonly name = 'NotSignedInError';
}

/** Signed in, but this is somebody else's to do. */
export class RoleError extends Error {
  override readonly name = 'RoleError';
}

/** A shared bench names somebody who has not signed on at it yet. */
export class SignOnError extends Error {
  override readonly name = 'SignOnError';
}

/** A write that came by cookie from another site. */
export class OriginError extends Error {
  override readonly name = 'OriginError';
}

/** A safety gate or a readiness rule is in the way; each reason, and the way through. */
export class GateError extends Error {
  override readonly name = 'GateError';
  constructor(
    what: string,
    readonly reasons: readonly string[],
    readonly remedy: string | undefined,
  ) {
    super(what);
  }
}

export class NotFoundError extends Error {
  override readonly name = 'NotFoundError';
}

export class ConflictError extends Error {
  override readonly name = 'ConflictError';
  constructor(
    message: string,
    readonly remedy?: string,
  ) {
    super(message);
  }
}

/** The serial number is on the books already. */
export class SameSerialError extends Error {
  override readonly name = 'SameSerialError';
  constructor(readonly units: readonly number[]) {
    super(`The serial number is on the books already: ${units.map(unitNumberText).join(', ')}.`);
  }
}

/** The request's fields are at fault, each one named. */
export class InvalidError extends Error {
  override readonly name = 'InvalidError';
  constructor(readonly faults: readonly Fault[]) {
    super(faults.map(({ pointer, reason }) => `${pointer || 'the request'}: ${reason}`).join('; '));
  }
}

/** What is no request that can be looked at: broken JSON, another media type, a method that the path does not know. */
export class MalformedError extends Error {
  override readonly name = 'MalformedError';
  constructor(
    readonly status: 400 | 405 | 413 | 415,
    message: string,
  ) {
    super(message);
  }
}

export class TooManyError extends Error {
  override readonly name = 'TooManyError';
  constructor(readonly retryAfterSeconds: number) {
    super('Too many tries.');
  }
}
