import { createPrivateKey, createPublicKey, generateKeyPairSync, type KeyObject } from 'node:crypto';
import { chmodSync, existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { calculateJwkThumbprint, exportJWK } from 'jose';
import { SetUpError } from '../../set-up-error.js';

/** Ed25519 (RFC 8032). `kid` is the thumbprint of the public key (RFC 7638). */
export interface SigningKey {
  kid: string;
  privateKey: KeyObject;
  publicKey: KeyObject;
}

const FILE = 'signing-key.pem';
const OWNER_ONLY = 0o600;

export async function signingKeyOf(privateKey: KeyObject): Promise<SigningKey> {
  const publicKey = createPublicKey(privateKey);
  return { kid: await calculateJwkThumbprint(await exportJWK(publicKey)), privateKey, publicKey };
}

/** Made at the first start. Whoever loses it loses the tags that it signed: it belongs into every backup of the data folder. */
export async function loadSigningKey(dataDir: string): Promise<SigningKey> {
  const path = join(dataDir, FILE);
  if (!existsSync(path)) {
    const { privateKey } = generateKeyPairSync('ed25519');
    writeFileSync(path, privateKey.export({ type: 'pkcs8', format: 'pem' }), { mode: OWNER_ONLY, flag: 'wx' });
  }
  chmodSync(path, OWNER_ONLY);
  const privateKey = readKey(path);
  if (privateKey?.asymmetricKeyType !== 'ed25519') {
    throw new SetUpError(
      `The signing key ${path} can't be read as an Ed25519 key.`,
      'Put it back from a backup. Without it no tag that was signed before can be checked.',
    );
  }
  return signingKeyOf(privateKey);
}

function readKey(path: string): KeyObject | undefined {
  try {
    return createPrivateKey(readFileSync(path));
  } catch {
    return undefined;
  }
}
