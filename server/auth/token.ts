import { createHash, randomBytes } from 'node:crypto';

const TOKEN_BYTES = 32;

/** Opaque, 256 bits of chance; only its hash is stored. */
export const newToken = (): string => randomBytes(TOKEN_BYTES).toString('base64url');

/** No salt: 256 random bits cannot be guessed from a plain SHA-256. */
export const tokenHash = (token: string): Buffer => createHash('sha256').update(token).digest();
