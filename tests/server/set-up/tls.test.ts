import { copyFileSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { get } from 'node:https';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { TLSSocket } from 'node:tls';
import { pino } from 'pino';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { addressOf, closeServer, listen, networkAddressesOf } from '../../../server/listen.js';
import { daysLeft, readTlsPair } from '../../../server/tls.js';
import { SetUpError } from '../../../server/set-up-error.js';
import { makeCertificate } from '../../helpers/certificate.js';

let folder: string;
let workshop: { certFile: string; keyFile: string };
let other: { certFile: string; keyFile: string };
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-tls-'));
  workshop = makeCertificate(folder, 'workshop.test');
  other = makeCertificate(folder, 'renewed.test', 365);
});
afterAll(() => {
  rmSync(folder, { recursive: true, force: true });
});

const answer = (_request: unknown, response: { end(text: string): void }): void => {
  response.end('ok');
};
/** Whom the certificate that a client is shown speaks for. */
const shownBy = (port: number): Promise<string> =>
  new Promise((resolve, reject) => {
    get({ port, host: '127.0.0.1', rejectUnauthorized: false, agent: false }, (response) => {
      const { subject } = (response.socket as TLSSocket).getPeerCertificate();
      response.resume().on('end', () => {
        resolve(String(subject.CN));
      });
    }).on('error', reject);
  });

test('When a pair is given, then the server speaks https and says so in its address', async () => {
  const server = await listen(answer, '127.0.0.1', 0, { tls: { files: workshop, log: pino({ level: 'silent' }) } });
  expect(addressOf(server)).toMatch(/^https:\/\/127\.0\.0\.1:\d+$/);
  expect(await shownBy((server.address() as AddressInfo).port)).toBe('workshop.test');
  await closeServer(server);
});

test('When the files are renewed and SIGHUP comes, then every door shows the new pair without a restart; a broken one leaves the old', async () => {
  const files = { certFile: join(folder, 'live.pem'), keyFile: join(folder, 'live.key') };
  const put = (pair: typeof files): void => {
    copyFileSync(pair.certFile, files.certFile);
    copyFileSync(pair.keyFile, files.keyFile);
  };
  put(workshop);
  const listenersBefore = process.listenerCount('SIGHUP');
  const logged: string[] = [];
  const tls = { files, log: pino({ level: 'warn' }, { write: (line: string) => void logged.push(line) }) };
  // The house's door, and the street's: started alike.
  const doors = [await listen(answer, '127.0.0.1', 0, { tls }), await listen(answer, '127.0.0.1', 0, { tls })];
  const shown = () => Promise.all(doors.map((door) => shownBy((door.address() as AddressInfo).port)));
  expect(await shown()).toEqual(['workshop.test', 'workshop.test']);

  put(other);
  process.emit('SIGHUP');
  expect(await shown()).toEqual(['renewed.test', 'renewed.test']);
  expect(logged).toEqual([]);

  copyFileSync(workshop.keyFile, files.keyFile); // the wrong key
  process.emit('SIGHUP');
  expect(await shown()).toEqual(['renewed.test', 'renewed.test']);
  expect(logged.join('')).toContain('the old one goes on');

  for (const door of doors) await closeServer(door);
  expect(process.listenerCount('SIGHUP')).toBe(listenersBefore);
});

test('When its days are counted, then they are those that it was made for', () => {
  const pair = readTlsPair(workshop);
  expect(daysLeft(pair, new Date())).toBeGreaterThanOrEqual(29);
  expect(daysLeft(pair, new Date(Date.now() + 40 * 86_400_000))).toBeLessThan(0);
});

test.each<[string, () => { certFile: string; keyFile: string }, RegExp]>([
  ['the certificate is not there', () => ({ ...workshop, certFile: join(folder, 'none.pem') }), /TLS_CERT is not there: .+none\.pem/],
  ['the key is not there', () => ({ ...workshop, keyFile: join(folder, 'none.key') }), /TLS_KEY is not there: .+none\.key/],
  ['the key is of another certificate', () => ({ ...workshop, keyFile: other.keyFile }), /does not belong to the certificate/],
  ['the two are exchanged', () => ({ certFile: workshop.keyFile, keyFile: workshop.certFile }), /holds no certificate/],
  [
    'the file is something else',
    () => {
      writeFileSync(join(folder, 'text.pem'), 'a certificate');
      return { ...workshop, certFile: join(folder, 'text.pem') };
    },
    /text\.pem holds no certificate in PEM/,
  ],
])('When %s, then the start says which file and which setting', (_what, files, words) => {
  let refused: unknown;
  try {
    readTlsPair(files());
  } catch (error) {
    refused = error;
  }
  expect(refused).toBeInstanceOf(SetUpError);
  expect((refused as SetUpError).message).toMatch(words);
  expect((refused as SetUpError).remedy).toContain('TLS_CERT');
});

test('When it listens for the network, then it says under which names others reach it; on loopback there is none', async () => {
  const all = await listen(answer, '0.0.0.0', 0);
  const { port } = all.address() as AddressInfo;
  const addresses = networkAddressesOf(all);
  expect(addresses.length).toBeGreaterThan(0);
  for (const address of addresses) expect(new URL(address).port).toBe(String(port));
  expect(addresses.join(' ')).not.toContain('127.0.0.1');
  await closeServer(all);

  const here = await listen(answer, '127.0.0.1', 0);
  expect(networkAddressesOf(here)).toEqual([]);
  await closeServer(here);
});
