import { z } from 'zod';

/** An error over HTTP: problem details, RFC 9457. `errors` points into the request by JSON pointer (RFC 6901). */
export const problemSchema = z.looseObject({
  type: z.string(),
  title: z.string(),
  status: z.number().int(),
  detail: z.string().optional(),
  errors: z.array(z.strictObject({ pointer: z.string(), reason: z.string() })).optional(),
  /** What to do about it, where there is something. */
  remedy: z.string().optional(),
});
export type Problem = z.infer<typeof problemSchema>;

/** Kinds of problem; `type` is `urn:refettle:problem:<kind>`. */
export const PROBLEM_TYPE_PREFIX = 'urn:refettle:problem:';
export type ProblemKind =
  | 'not-signed-in'
  | 'role'
  | 'sign-on'
  | 'origin'
  | 'gate'
  | 'not-found'
  | 'conflict'
  | 'same-serial'
  | 'malformed'
  | 'invalid'
  | 'too-many'
  | 'fault';
