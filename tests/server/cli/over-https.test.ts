// A bench and a server with a certificate that the shop made itself.
import { mkdtempSync, rmSync } from 'node:fs';
import type { Server } from 'node:http';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { execa } from 'execa';
import { pino } from 'pino';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { addressOf, closeServer, listen } from '../../../server/listen.js';
import { makeCertificate } from '../../helpers/certificate.js';
import { theProgram } from '../../helpers/the-program.js';

const checkout = join(import.meta.dirname, '../../..');
let folder: string;
let certificate: { certFile: string; keyFile: string };
let server: Server;
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-over-https-'));
  certificate = makeCertificate(folder, 'workshop.test');
  server = await listen(
    (_request, response) =>
      response
        .writeHead(401, { 'content-type': 'application/problem+json' })
        .end('{"type":"urn:refettle:problem:not-signed-in","title":"Sign in first","status":401}'),
    '127.0.0.1',
    0,
    { tls: { files: certificate, log: pino({ level: 'silent' }) } },
  );
});
afterAll(async () => {
  await closeServer(server);
  rmSync(folder, { recursive: true, force: true });
});

const signIn = (env: Record<string, string>) =>
  execa(process.execPath, [...theProgram, 'sign-in', '--email', 'wil@millrace.example', '--password-stdin'], {
    cwd: checkout,
    env: { PATH: process.env.PATH, HOME: folder, REFETTLE_HOME: join(folder, 'home'), REFETTLE_SERVER: addressOf(server), ...env },
    extendEnv: false,
    reject: false,
    input: 'a mill race in March\n',
  });

test('When the bench does not know the certificate, then it says so and how to trust it; told to trust it, it talks to the server', async () => {
  const wary = await signIn({});
  expect(wary.exitCode).toBe(5);
  expect(wary.stderr).toContain('does not trust its certificate');
  expect(wary.stderr).toContain('NODE_EXTRA_CA_CERTS=');

  const trusting = await signIn({ NODE_EXTRA_CA_CERTS: certificate.certFile });
  expect(trusting.exitCode).toBe(5);
  expect(trusting.stderr).not.toContain('certificate');
}, 120_000);
