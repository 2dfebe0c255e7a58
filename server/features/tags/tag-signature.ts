import { createHash, timingSafeEqual } from 'node:crypto';
import { CompactSign, compactVerify, decodeProtectedHeader } from 'jose';
import { tagContentSchema, type TagContent } from '../../../shared/api/tags.js';
import { canonicalJson } from '../../canonical-json.js';
import type { SigningKey } from './signing-key.js';

/** RFC 8037: the JWS algorithm for Ed25519. */
const ALGORITHM = 'EdDSA';

/** The whole tag as a compact JWS. */
export function signTag(content: TagContent, key: SigningKey): Promise<string> {
  return new CompactSign(new TextEncoder().encode(canonicalJson(content)))
    .setProtectedHeader({ alg: ALGORITHM, kid: key.kid })
    .sign(key.privateKey);
}

/** Which key signed it, by its own word. */
export function kidOf(jws: string): string {
  try {
    return decodeProtectedHeader(jws).kid ?? '';
  } catch {
    return '';
  }
}

/** What the signature covers, or undefined where it does not hold. */
export async function verifiedContent(jws: string, key: Pick<SigningKey, 'publicKey'>): Promise<TagContent | undefined> {
  try {
    const { payload } = await compactVerify(jws, key.publicKey, { algorithms: [ALGORITHM] });
    return tagContentSchema.parse(JSON.parse(new TextDecoder().decode(payload)));
  } catch {
    return undefined;
  }
}

/** The third part of a compact JWS: 64 bytes, 86 characters. It stands in the address that the QR code holds. */
export const signaturePart = (jws: string): string => jws.split('.')[2] ?? '';

/** Takes as long for a near miss as for a far one. */
export function sameText(a: string, b: string): boolean {
  const digest = (text: string): Buffer => createHash('sha256').update(text).digest();
  return timingSafeEqual(digest(a), digest(b));
}
