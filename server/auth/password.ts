import { hash, verify } from '@node-rs/argon2';

/** The package's `Algorithm.Argon2id`; its const enum does not exist at run time. */
const ARGON2ID = 2;
/** OWASP's least for argon2id (Password Storage Cheat Sheet): 19 MiB, two passes, one lane. */
const ARGON2 = { algorithm: ARGON2ID, memoryCost: 19_456, timeCost: 2, parallelism: 1 };

export const hashPassword = (password: string): Promise<string> => hash(password, ARGON2);

let nobodysHash: Promise<string> | undefined;

/** Nobody's password takes as long to refuse as somebody's wrong one, so that the time does not tell who has an account. */
export async function passwordFits(password: string, passwordHash: string | undefined): Promise<boolean> {
  nobodysHash ??= hashPassword('nobody has this password');
  const fits = await verify(passwordHash ?? (await nobodysHash), password);
  return fits && passwordHash !== undefined;
}

/** A PIN's few digits are guarded by the limits on tries and by the bench's token; the hash is as dear as a password's. */
export const hashPin = hashPassword;
export const pinFits = passwordFits;
