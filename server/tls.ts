import { X509Certificate, createPrivateKey } from 'node:crypto';
import { readFileSync, unwatchFile, watchFile } from 'node:fs';
import type { Server } from 'node:https';
import { createSecureContext } from 'node:tls';
import type { Logger } from 'pino';
import { SetUpError } from './set-up-error.js';

/** Files in PEM: the certificate with its chain, and its key. */
export interface TlsFiles {
  certFile: string;
  keyFile: string;
}

/** What a listener speaks https by. */
export interface Tls {
  files: TlsFiles;
  log: Logger;
}

export interface TlsPair {
  cert: string;
  key: string;
}

/** Whatever renews a certificate writes two files; by the next look both are there. */
const LOOKED_AT_EVERY_MS = 10_000;

/** Reads the pair, and says what is wrong with it, by file and setting. */
export function readTlsPair({ certFile, keyFile }: TlsFiles): TlsPair {
  const cert = readPem('TLS_CERT', certFile);
  const key = readPem('TLS_KEY', keyFile);
  const certificate = parsed('TLS_CERT', certFile, 'certificate', () => new X509Certificate(cert));
  const privateKey = parsed('TLS_KEY', keyFile, 'private key without a passphrase', () => createPrivateKey(key));
  if (!certificate.checkPrivateKey(privateKey)) {
    throw new SetUpError(
      `The key ${keyFile} does not belong to the certificate ${certFile}.`,
      'Name the two files that were made together: TLS_CERT (the certificate first, then its chain) and TLS_KEY.',
    );
  }
  parsed('TLS_CERT', certFile, 'certificate with its chain', () => createSecureContext({ cert, key }));
  return { cert, key };
}

function readPem(setting: string, file: string): string {
  try {
    return readFileSync(file, 'utf8');
  } catch (cause) {
    const why = (cause as NodeJS.ErrnoException).code === 'ENOENT' ? 'is not there' : `can't be read (${String((cause as Error).message)})`;
    throw new SetUpError(
      `The file of ${setting} ${why}: ${file}.`,
      `Name a file in PEM that this user may read, or unset TLS_CERT and TLS_KEY.`,
      {
        cause,
      },
    );
  }
}

function parsed<T>(setting: string, file: string, what: string, parse: () => T): T {
  try {
    return parse();
  } catch (cause) {
    throw new SetUpError(`${file} holds no ${what} in PEM.`, `Set ${setting} to a file that begins with -----BEGIN.`, { cause });
  }
}

/** Days until it ends, counted from now; negative once it has. */
export function daysLeft({ cert }: TlsPair, now: Date): number {
  const DAY_MS = 86_400_000;
  return Math.floor((Date.parse(new X509Certificate(cert).validTo) - now.getTime()) / DAY_MS);
}

/**
 * Takes a renewed certificate while the server runs: when one of the files changes, and on SIGHUP. A pair that can't be used is said,
 * and the old one goes on. The answer stops it. `listen` does it for every door.
 */
export function keepTlsFresh(server: Server, files: TlsFiles, log: Logger): () => void {
  const renew = (): void => {
    try {
      server.setSecureContext(readTlsPair(files));
    } catch (error) {
      log.warn({ err: error }, 'the certificate has changed and can’t be used; the old one goes on');
    }
  };
  const onHangUp = (): void => {
    renew();
  };
  const paths = [files.certFile, files.keyFile];
  for (const path of paths) watchFile(path, { interval: LOOKED_AT_EVERY_MS, persistent: false }, renew);
  process.on('SIGHUP', onHangUp);
  return () => {
    for (const path of paths) unwatchFile(path, renew);
    process.off('SIGHUP', onHangUp);
  };
}
