// What the three forms don't show: finding somebody, the file that the audit log is written to, passwords typed at a terminal.
import { mkdtempSync, readdirSync, readFileSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { runProgram } from '../../../cli/program.js';
import { benchTerminal, signedIn } from '../../helpers/bench-terminal.js';
import { cheapHash } from '../../helpers/shared-bench.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type SignedInPerson, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
let http: OverHttp;
let address: string;
const folder = mkdtempSync(join(tmpdir(), 'refettle-people-'));
beforeAll(async () => {
  server = await startTestServer();
  server.deps.clock = () => new Date();
  http = await overHttp(server.app);
  address = http.address;
});
afterAll(async () => {
  await http.unplug();
  await server.close();
  rmSync(folder, { recursive: true, force: true });
});

interface Options {
  as?: SignedInPerson;
  input?: string;
  keys?: readonly (readonly [string, string])[];
}

async function refettle(args: string[], { as = server.people.admin, input, keys }: Options = {}) {
  const bench = benchTerminal({ terminal: keys !== undefined, env: { REFETTLE_SERVER: address } });
  try {
    signedIn(bench, as);
    for (const [says, press] of keys ?? []) bench.when(says, press);
    if (keys === undefined) (bench.context.stdin as unknown as { end(text: string): void }).end(input ?? '');
    return { code: await runProgram(args, bench.context), stdout: bench.stdout(), stderr: bench.stderr() };
  } finally {
    bench.remove();
  }
}

test('When a part of a name is nobody else’s, then it is enough; when it may be two, then both are named and nothing is done', async () => {
  expect((await refettle(['person', 'role', 'ODILE', 'lead'])).stdout).toBe('Odile Finch is lead from now on.\n');
  await refettle(['person', 'role', 'odile.finch@millrace.example', 'sales']);
  // Maren Holt and Ines Marlow.
  const two = await refettle(['person', 'role', 'mar', 'technician']);
  expect([two.code, two.stdout]).toEqual([3, '']);
  expect(two.stderr).toMatch(/Maren Holt \(maren\.holt@millrace\.example\) or Ines Marlow/);
  const nobody = await refettle(['person', 'deactivate', 'nobody@millrace.example', '--reason', 'x', '--json']);
  expect(nobody.code).toBe(3);
  expect(nobody.stderr).toContain('refettle person list');
});

test('When a technician asks for people or the log, then it exits 5 and says whose it is', async () => {
  for (const args of [['person', 'list'], ['audit'], ['audit', '--csv', join(folder, 'not.csv')], ['session', 'list', '--person', 'x']]) {
    const { code, stdout, stderr } = await refettle(args, { as: server.people.technician });
    expect([code, stdout]).toEqual([5, '']);
    expect(stderr).toContain('This is for admin; you are signed in as technician.');
  }
  expect(readdirSync(folder)).toEqual([]);
});

test('When somebody is invited at a terminal, then what is missing is asked for, and a deactivation asks why', async () => {
  const { code, stdout, stderr } = await refettle(['person', 'invite'], {
    keys: [
      ['E-mail address', 'tamsin@millrace.example\r'],
      ['Name', 'Tamsin Oake\r'],
      ['Role', '\r'],
    ],
  });
  expect([code, stderr]).toEqual([0, expect.stringContaining('It is shown only now.') as unknown]);
  expect(stdout).toMatch(/^Tamsin Oake is invited as technician\. [\s\S]+\/link#[\w-]{43}$/m);
  const out = await refettle(['person', 'deactivate', 'Tamsin Oake'], { keys: [['Why Tamsin Oake', 'never came\r']] });
  expect(out.stdout).toMatch(/^Tamsin Oake is deactivated/);
  // Nobody to ask: exit 2, and which option answers.
  const piped = await refettle(['person', 'invite', 'x@millrace.example', '--role', 'lead']);
  expect([piped.code, piped.stderr]).toEqual([2, expect.stringContaining('--name') as unknown]);
});

test('When the log is written to a file, then it is there whole, for its owner only, and is what standard output would get', async () => {
  const file = join(folder, 'audit.csv');
  const written = await refettle(['audit', '--csv', file, '--json']);
  expect([written.code, written.stderr]).toEqual([0, '']);
  expect(JSON.parse(written.stdout)).toEqual({ file, bytes: statSync(file).size });
  expect(statSync(file).mode & 0o777).toBe(0o600);
  const text = readFileSync(file, 'utf8');
  expect(text).toMatch(/^number,at,who,who_role,who_id,what,subject_kind,subject,subject_id,before,after\r\n/);
  expect((await refettle(['audit', '--csv', '-'])).stdout).toBe(text);
  expect(readdirSync(folder)).toEqual(['audit.csv']);

  const nowhere = await refettle(['audit', '--csv', join(folder, 'no', 'such', 'folder.csv')]);
  expect([nowhere.code, nowhere.stdout]).toEqual([3, '']);
  expect((await refettle(['audit', '--csv', '-', '--json'])).code).toBe(2);
});

test('When the log is read for some days, then the last one counts whole; what is no time is wrong usage', async () => {
  const today = new Date();
  const day = `${today.getFullYear()}-${String(today.getMonth() + 1).padStart(2, '0')}-${String(today.getDate()).padStart(2, '0')}`;
  const within = await refettle(['audit', '--from', day, '--to', day, '--json']);
  expect((JSON.parse(within.stdout) as { items: unknown[] }).items.length).toBeGreaterThan(0);
  const before = await refettle(['audit', '--to', '2020-01-01']);
  expect([before.code, before.stdout, before.stderr]).toEqual([0, '', 'Nothing like that is in the log.\n']);
  expect((await refettle(['audit', '--from', 'yesterday'])).code).toBe(2);
});

test('When the new password is typed in two ways, then nothing is changed; when the old one is wrong, then the server says so', async () => {
  const as = server.people.technician;
  await server.deps
    .db('people')
    .where({ id: as.id })
    .update({ password_hash: await cheapHash('the old long password') });
  const typed = (old: string, first: string, second: string) =>
    refettle(['password'], {
      as,
      keys: [
        ['Old password', `${old}\r`],
        ['New password', `${first}\r`],
        ['The new one again', `${second}\r`],
      ],
    });
  const differs = await typed('the old long password', 'a new long password', 'a new lung password');
  expect([differs.code, differs.stdout]).toEqual([2, '']);
  const wrong = await typed('not the old password', 'a new long password', 'a new long password');
  expect([wrong.code, wrong.stdout]).toEqual([5, '']);
  expect(wrong.stderr).toContain('is not your password');
  const done = await typed('the old long password', 'a new long password', 'a new long password');
  expect([done.code, done.stdout]).toEqual([0, 'The password is changed.\n']);
  for (const { stderr } of [differs, wrong, done]) expect(stderr).not.toMatch(/long password|lung password/);
  expect((await refettle(['password', '--stdin'], { as, input: 'only one line\n' })).code).toBe(2);
});

test('When a session is ended by the end of its id, then that one has ended; an id of somebody else is not found', async () => {
  const [mine, theirs] = [await server.addPerson('sales', 'Session Owner'), await server.addPerson('sales', 'Session Other')];
  const listed = JSON.parse((await refettle(['session', 'list', '--json'], { as: theirs })).stdout) as {
    items: { id: string; current: boolean }[];
  };
  expect(listed.items.map(({ current }) => current)).toEqual([true]);
  const short = listed.items[0]?.id.slice(-8) ?? '';
  const refused = await refettle(['session', 'revoke', short], { as: mine });
  expect([refused.code, refused.stdout]).toEqual([3, '']);
  expect((await refettle(['session', 'revoke', short, '--person', 'Session Other'])).stdout).toBe('Ended 1 session.\n');
  expect((await refettle(['session', 'list'], { as: theirs })).code).toBe(5);
});
