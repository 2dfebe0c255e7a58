import { execFileSync } from 'node:child_process';
import { join } from 'node:path';

/** A certificate that nobody else has signed, for these names, with its key: two files in a folder. */
export function makeCertificate(folder: string, name: string, days = 30): { certFile: string; keyFile: string } {
  const [certFile, keyFile] = [join(folder, `${name}.pem`), join(folder, `${name}.key`)];
  execFileSync(
    'openssl',
    [
      ...['req', '-x509', '-newkey', 'ec', '-pkeyopt', 'ec_paramgen_curve:prime256v1', '-nodes', '-days', String(days)],
      ...['-subj', `/CN=${name}`, '-addext', `subjectAltName=DNS:${name},IP:127.0.0.1`, '-keyout', keyFile, '-out', certFile],
    ],
    { stdio: 'ignore' },
  );
  return { certFile, keyFile };
}
