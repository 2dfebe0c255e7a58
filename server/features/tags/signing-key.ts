import { createPrivateKey, createPublicKey, generateKeyPairSync, type KeyObject } from 'node:crypto';
import { chmodSync, closeSync, existsSync, fsyncSync, openSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { calculateJwkThumbprint, exportJWK } from 'jose';
import { SetUpError } from '../../set-up-error.js';

/** Ed25519 (RFC 8032). `kid` is the thumbprint of the public key (RFC 7638). */
export interface SigningKey {
  kid: string;
  privateKey: KeyObject;
  publicKey: KeyObject;
}

/** Only the key that signs now: what it signed is verified by the public half, which the database keeps (signing-key-store.ts). */
const FILE = 'signing-key.pem';
const OWNER_ONLY = 0o600;

export async function signingKeyOf(privateKey: KeyObject): Promise<SigningKey> {
  const publicKey = createPublicKey(privateKey);
  return { kid: await calculateJwkThumbprint(await exportJWK(publicKey)), privateKey, publicKey };
}

/** At a start: reads the key, or makes the first one. */
export async function loadSigningKey(dataDir: string): Promise<SigningKey> {
  const path = join(dataDir, FILE);
  if (!existsSync(path)) {
    const made = await newSigningKey(dataDir);
    made.install();
  }
  return readSigningKey(dataDir);
}

/** The key as its file has it now: it may have been rotated while the server runs. */
export async function readSigningKey(dataDir: string): Promise<SigningKey> {
  const path = join(dataDir, FILE);
  const privateKey = readKey(path);
  if (privateKey?.asymmetricKeyType !== 'ed25519') {
    throw new SetUpError(
      `The signing key ${path} can't be read as an Ed25519 key.`,
      'Put it back from a backup; or move it aside and start: a new one is made, and tags that were signed before are still verified.',
    );
  }
  chmodSync(path, OWNER_ONLY);
  return signingKeyOf(privateKey);
}

/** A new key, on the disk beside the one in use; `install` puts it in its place. A crash in between leaves the old one whole. */
export async function newSigningKey(dataDir: string): Promise<{ key: SigningKey; install: () => void; discard: () => void }> {
  const { privateKey } = generateKeyPairSync('ed25519');
  const path = join(dataDir, FILE);
  const beside = `${path}.new`;
  rmSync(beside, { force: true });
  writeFileSync(beside, privateKey.export({ type: 'pkcs8', format: 'pem' }), { mode: OWNER_ONLY, flag: 'wx', flush: true });
  return {
    key: await signingKeyOf(privateKey),
    install: () => {
      renameSync(beside, path);
      syncFolder(dataDir);
    },
    discard: () => {
      rmSync(beside, { force: true });
    },
  };
}

function syncFolder(folder: string): void {
  const descriptor = openSync(folder, 'r');
  try {
    fsyncSync(descriptor);
  } finally {
    closeSync(descriptor);
  }
}

function readKey(path: string): KeyObject | undefined {
  try {
    return createPrivateKey(readFileSync(path));
  } catch {
    return undefined;
  }
}
