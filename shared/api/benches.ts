import { z } from 'zod';
import { personRefSchema } from '../history/events.js';
import { roleSchema } from './roles.js';
import { shopSchema } from './sessions.js';

/** The header by which a shared bench says for whom it writes: the id of somebody who has signed on at it. */
export const PERSON_HEADER = 'Refettle-Person';

/** Four to eight digits: quick with gloves on, and good only together with the token of a bench. */
export const PIN_DIGITS = { least: 4, most: 8 };
export const pinSchema = z
  .string()
  .regex(new RegExp(`^\\d{${PIN_DIGITS.least},${PIN_DIGITS.most}}$`), {
    error: `${PIN_DIGITS.least} to ${PIN_DIGITS.most} digits`,
    abort: true,
  })
  .refine((pin) => !isEasyPin(pin), 'too easy to guess: not all the same digit, and not counted up or down');

/**
 * Whether a PIN is among the first that anybody tries: one digit over and over, or digits counted up or down.
 *
 * @example isEasyPin('4567') // true
 */
export function isEasyPin(pin: string): boolean {
  const steps = [...pin].slice(1).map((digit, index) => Number(digit) - Number(pin[index]));
  return [0, 1, -1].some((step) => steps.every((one) => one === step));
}

const benchName = z
  .string()
  .trim()
  .min(1, 'type a name')
  .max(60)
  .regex(/^[\p{L}\p{N}][\p{L}\p{N} ._-]*$/u, 'letters, digits, blanks, dots and dashes');

/** What hangs on a bench, as the bench itself has it in its rig file. */
export const benchRigSchema = z.strictObject({
  name: z.string().max(100),
  instruments: z
    .array(
      z.strictObject({
        id: z.string().max(100),
        kind: z.string().max(50),
        port: z.string().max(200).optional(),
        identification: z.string().max(200).optional(),
      }),
    )
    .max(50),
});
export type BenchRig = z.infer<typeof benchRigSchema>;

export const benchSchema = z.strictObject({
  id: z.string(),
  name: z.string(),
  madeAt: z.string(),
  madeBy: personRefSchema,
  /** To the minute; absent while it has never called. */
  lastSeenAt: z.string().optional(),
  /** Its token is no longer good. */
  revokedAt: z.string().optional(),
  rig: benchRigSchema.optional(),
  rigReportedAt: z.string().optional(),
  people: z.array(z.strictObject({ id: z.string(), name: z.string(), role: roleSchema, lastSignedOnAt: z.string() })),
});
export type Bench = z.infer<typeof benchSchema>;

export const newBenchSchema = z.strictObject({ name: benchName });
/** The token is in this answer and nowhere else: the server keeps its hash. */
export const benchWithTokenSchema = z.strictObject({ bench: benchSchema, token: z.string() });

/** Somebody whom a bench has seen. When the PIN was set tells the bench whether what it keeps for working offline still holds. */
export const benchPersonSchema = personRefSchema.extend({ pinSetAt: z.string() });
export type BenchPerson = z.infer<typeof benchPersonSchema>;

/** A bench's own view: itself, the shop, and whom it may offer at sign-on. Names only: nobody's e-mail address stands on a shared screen. */
export const ownBenchSchema = z.strictObject({
  bench: z.strictObject({ id: z.string(), name: z.string() }),
  shop: shopSchema,
  people: z.array(benchPersonSchema),
});
export type OwnBench = z.infer<typeof ownBenchSchema>;

/** By the id of somebody the bench has seen, or by what was typed: a name, or an e-mail address where two have the same name. */
export const signOnSchema = z.strictObject({
  person: z.uuid().optional(),
  name: z.string().trim().min(1).max(320).optional(),
  // Not `pinSchema`: what is no PIN is a wrong one, refused in the same words and the same time.
  pin: z.string().min(1).max(100),
});
export const signedOnSchema = z.strictObject({
  person: benchPersonSchema,
  /** argon2id, made for this bench: with it the bench knows the PIN again while the network is away. */
  verifier: z.string(),
});

export const ownPinSchema = z.strictObject({ password: z.string().min(1, 'type your password').max(1024), pin: pinSchema });
export const pinOfAnotherSchema = z.strictObject({ pin: pinSchema });
/** Who has a PIN, and since when; nobody ever sees the PIN itself. */
export const pinStateSchema = z.strictObject({
  person: personRefSchema,
  pinSetAt: z.string().optional(),
  /** Absent: set by the person. */
  pinSetBy: z.string().optional(),
});
export type PinState = z.infer<typeof pinStateSchema>;
