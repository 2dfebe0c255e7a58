import { createHash } from 'node:crypto';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { calculateJwkThumbprint, compactVerify, createLocalJWKSet } from 'jose';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { kidOf, signaturePart } from '../../../server/features/tags/tag-signature.js';
import { rotateSigningKey } from '../../../server/features/tags/rotate-signing-key.js';
import { loadSigningKey, readSigningKey } from '../../../server/features/tags/signing-key.js';
import { addHeron, mendAndProve, pass, rulesSeen, signedOffUnit, takeIn } from '../../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
let dataDir: string;
/** Signed with the first key, which every test may rotate away. */
let first: Awaited<ReturnType<typeof signedOffUnit>>;
beforeAll(async () => {
  dataDir = mkdtempSync(join(tmpdir(), 'refettle-keys-'));
  await loadSigningKey(dataDir);
  server = await startTestServer({ signingKey: () => readSigningKey(dataDir) });
  await addHeron(server);
  first = await signedOffUnit(server);
});
afterAll(async () => {
  await server.close();
  rmSync(dataDir, { recursive: true, force: true });
});

const rotate = (compromised?: Parameters<typeof rotateSigningKey>[0]['compromised']) =>
  rotateSigningKey({ db: server.deps.db, dataDir, now: server.time.now, compromised });
const look = (tag: { state: { number: string }; jws: string }) =>
  server.ok('getPublicTag', { params: { tag: tag.state.number }, query: { signature: signaturePart(tag.jws) } });

test('When an RSA key is named by its thumbprint, then it is the one that RFC 7638 prints', async () => {
  // RFC 7638, section 3.1: key and thumbprint.
  const key = {
    kty: 'RSA',
    n: '0vx7agoebGcQSuuPiLJXZptN9nndrQmbXEps2aiAFbWhM78LhWx4cbbfAAtVT86zwu1RK7aPFFxuhDR1L6tSoc_BJECPebWKRXjBZCiFV4n3oknjhMstn64tZ_2W-5JsGY4Hc5n9yBXArwl93lqt7_RN5w6Cf0h4QyQ5v-65YGjQR0_FDW2QvzqY368QQMicAtaSqzs8KJZgnYb9c7d0zgdAZHzu6qMQvRL5hajrn1n91CbOpbISD08qNLyrdkt-bFTWhAI4vMQFh6WeZu0fM4lFd2NcRwr3XPksINHaQ-G_xBniIqbw0Ls1jF44-csFCur-kEgU8awapJzKnqDKgw',
    e: 'AQAB',
  };
  expect(await calculateJwkThumbprint(key)).toBe('NzbLsXh8uDCcd-6MNwXF4W_7noWXFZAfHkxZsRGC9Xs');
});

test('When the key is rotated under a running server, then new tags carry the new one, and old tags are verified as before', async () => {
  const rotated = await rotate();
  const { tag } = await signedOffUnit(server);
  const again = await rotate();

  expect([rotated.withdrawn, again.withdrawn]).toEqual([[], []]);
  expect([kidOf(tag.jws), again.before]).toEqual([rotated.after, rotated.after]);
  expect(kidOf(first.tag.jws)).not.toBe(rotated.after);
  expect(await look(first.tag)).toMatchObject({ standing: 'stands', content: { tag: first.tag.state.number } });
  expect(await look(tag)).toMatchObject({ standing: 'stands' });
  const noted = await server.deps.db('audit_log').where({ what: 'key.rotated' }).pluck<string[]>('subject_id');
  expect(noted).toEqual(expect.arrayContaining([rotated.before, again.before]));

  // Somebody else, with the key set alone.
  const set = await server.ok('getPublicKeys');
  for (const { jws, state } of [first.tag, tag]) {
    const { payload } = await compactVerify(jws, createLocalJWKSet(set));
    expect(JSON.parse(new TextDecoder().decode(payload))).toMatchObject({ tag: state.number });
  }
});

test('When the key set is read, then each key is named by its thumbprint, and no private part is shown', async () => {
  await rotate();
  const { keys } = await server.ok('getPublicKeys');
  expect(keys.length).toBeGreaterThan(1);
  for (const key of keys) {
    // RFC 7638, section 3, worked out by hand: SHA-256 of the required members in their order, without blanks.
    const members = `{"crv":"Ed25519","kty":"OKP","x":"${key.x}"}`;
    expect(key.kid).toBe(createHash('sha256').update(members).digest('base64url'));
    expect(Object.keys(key).sort()).toEqual(['alg', 'crv', 'kid', 'kty', 'use', 'x']);
  }
});

test('When a key is called compromised, then its standing tags are withdrawn, it leaves the key set, and the unit can be signed anew', async () => {
  await rotate();
  const { unit, tag } = await signedOffUnit(server);
  pass(server, 1);
  const rotated = await rotate({ by: server.people.lead, reason: 'the laptop was stolen' });

  expect(rotated.withdrawn).toEqual([tag.state.number]);
  expect(await look(tag)).toMatchObject({ standing: 'withdrawn', content: { tag: tag.state.number } });
  expect(await look(first.tag)).toMatchObject({ standing: 'stands' });
  expect((await server.ok('getPublicKeys')).keys.map(({ kid }) => kid)).not.toContain(rotated.before);
  const page = await server.ok('getUnit', { params: { number: unit.number }, as: server.people.lead });
  expect(page.events.find((event) => event.kind === 'tag withdrawn')).toMatchObject({
    reason: 'The signing key is compromised: the laptop was stolen',
    by: { id: server.people.lead.id },
  });

  const again = await server.ok('signOff', {
    params: { number: unit.number },
    as: server.otherLead,
    body: await rulesSeen(server, unit.number),
  });
  expect(kidOf(again.jws)).toBe(rotated.after);
  expect((await look(again)).standing).toBe('stands');
});

test('When the file still holds a key that has ended, then nothing is signed with it, and a second rotation mends that', async () => {
  const { after: kid } = await rotate();
  await server.deps.db('signing_keys').where({ kid }).update({ state: 'retired', ended_at: server.time.now });
  const { number } = await takeIn(server);
  await mendAndProve(server, number);
  const sign = { params: { number }, as: server.people.lead, body: await rulesSeen(server, number) };

  const refused = problemIn(await server.send('signOff', sign));
  expect(refused).toMatchObject({ status: 409, detail: expect.stringContaining('was retired') as string });
  expect(refused.remedy).toContain('npm run rotate-key');

  expect((await rotate()).before).toBe(kid);
  await server.ok('signOff', sign);
});

test('When the file of the key is lost, then a start makes another one, and old tags are still verified', async () => {
  rmSync(join(dataDir, 'signing-key.pem'));
  const { kid } = await loadSigningKey(dataDir);

  expect(kid).not.toBe(kidOf(first.tag.jws));
  expect((await look(first.tag)).standing).toBe('stands');
});

test('When the database refuses, then the old key stays and nothing is left beside it', async () => {
  const before = readFileSync(join(dataDir, 'signing-key.pem'), 'utf8');
  await expect(rotate({ by: { ...server.people.lead, id: 'no id' }, reason: 'the laptop was stolen' })).rejects.toThrow();

  expect(readFileSync(join(dataDir, 'signing-key.pem'), 'utf8')).toBe(before);
  expect(existsSync(join(dataDir, 'signing-key.pem.new'))).toBe(false);
  expect((await look(first.tag)).standing).toBe('stands');
});

test('When a tag names a key that nobody knows, then it is not ours', async () => {
  const { db } = server.deps;
  const known: unknown[] = await db('signing_keys')
    .where({ kid: kidOf(first.tag.jws) })
    .delete()
    .returning('*');
  expect((await look(first.tag)).standing).toBe('not ours');
  await db('signing_keys').insert(known);
  expect((await look(first.tag)).standing).toBe('stands');
});
