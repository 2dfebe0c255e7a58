// A computer that several people work at, through the real program and the real server: join, sign on, with and without the network.
import { mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { runProgram } from '../../../cli/program.js';
import { addHeron, takeIn } from '../../helpers/factories.js';
import { benchTerminal, signedIn } from '../../helpers/bench-terminal.js';
import { givePin, makeBench, PIN, type TestBench } from '../../helpers/shared-bench.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type SignedInPerson, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
let http: OverHttp;
let address: string;
let home: string;
let bench: TestBench;
let wil: SignedInPerson;
let maren: SignedInPerson;

beforeAll(async () => {
  server = await startTestServer({ shop: { demo: true } });
  server.deps.clock = () => new Date();
  home = mkdtempSync(join(tmpdir(), 'refettle-shared-'));
  await addHeron(server);
  bench = await makeBench(server, 'bench 1');
  wil = server.people.technician;
  maren = server.people.lead;
  for (const person of [wil, maren]) await givePin(server, person);
  http = await overHttp(server.app);
  address = http.address;
});
afterAll(async () => {
  await http.unplug();
  await server.close();
  rmSync(home, { recursive: true, force: true });
});

interface Typed {
  /** What is on standard input of a pipe. */
  input?: string;
  /** At a terminal: what is typed once standard error says this. */
  keys?: [says: string, press: string][];
  /** Minutes that have passed, for the bench's clock. */
  later?: number;
  env?: Record<string, string>;
}
async function refettle(args: string[], { input, keys, later = 0, env = {} }: Typed = {}) {
  const terminal = benchTerminal({ home, terminal: keys !== undefined, stdoutTerminal: false, env: { REFETTLE_SERVER: address, ...env } });
  for (const [says, press] of keys ?? []) terminal.when(says, press);
  if (input !== undefined) (terminal.context.stdin as unknown as { end: (text: string) => void }).end(input);
  const now = () => new Date(Date.now() + later * 60_000);
  const code = await runProgram(args, Object.assign(terminal.context, { now }));
  return { code, stdout: terminal.stdout(), stderr: terminal.stderr() };
}
const joinIt = () => refettle(['bench', 'join', '--token-stdin'], { input: `${bench.token}\n` });
const signOn = (name: string, pin = PIN, more: Typed = {}) =>
  refettle(['bench', 'sign-on', name, '--pin-stdin'], { input: `${pin}\n`, ...more });
const visual = async (typed: Typed = {}) => {
  const { number } = await takeIn(server);
  const outcome = await refettle(['measure', String(number), 'visual', '--verdict', 'pass', '--json'], typed);
  const page = await server.ok('getUnit', { as: maren, params: { number } });
  return { ...outcome, number, by: page.events.filter(({ kind }) => kind === 'inspection').map((event) => event.by.name) };
};
const kept = (file: string): string => readFileSync(join(home, file), 'utf8');

describe('Joining', () => {
  test('When the token is none of a bench, then nothing is kept', async () => {
    const wrong = await refettle(['bench', 'join', '--token-stdin'], { input: 'bench_none\n' });
    expect(wrong).toMatchObject({ code: 5, stdout: '' });
    expect(wrong.stderr).toMatch(/no longer good/);
    const ofAPerson = await refettle(['bench', 'join', '--token-stdin'], { input: `${wil.token}\n` });
    expect(ofAPerson).toMatchObject({ code: 5, stdout: '' });
    expect(ofAPerson.stderr).toMatch(/no token of a bench/);
    expect((await refettle(['bench', 'show'])).code).toBe(2);
  });

  test('When a bench joins, then its token is its owner’s alone to read, and nobody’s own sign-in stays on it', async () => {
    const own = await server.addPerson('technician', 'Was Signed In');
    const before = benchTerminal({ home, env: { REFETTLE_SERVER: address } });
    signedIn(before, own);
    const joined = await joinIt();
    expect(joined).toMatchObject({ code: 0, stdout: `This computer is the shared bench bench 1 of Millrace Mend, at ${address}.\n` });
    expect(joined.stderr).toContain('Was Signed In was signed in here and no longer is');
    expect(statSync(join(home, 'bench.json')).mode & 0o777).toBe(0o600);
    expect(() => kept('token.json')).toThrow();
    expect((await server.send('me', { as: own })).status).toBe(401);
  });

  test('When it is asked at a terminal, then the token is not shown', async () => {
    const joined = await refettle(['bench', 'join', '--json'], { keys: [['token', `${bench.token}\r`]] });
    expect(JSON.parse(joined.stdout)).toEqual({
      server: address,
      bench: { id: bench.id, name: 'bench 1' },
      shop: 'Millrace Mend',
      rig: null,
    });
    expect(joined.stderr).not.toContain(bench.token);
  });

  test('When the server is named nowhere, then it is the bench’s', async () => {
    expect((await refettle(['unit', 'list', '--json'], { env: { REFETTLE_SERVER: '' } })).code).toBe(0);
  });

  test('When somebody signs in with an own account on it, then that is refused with the way', async () => {
    const refused = await refettle(['sign-in', '--email', wil.email, '--password-stdin'], { input: 'any\n' });
    expect(refused.code).toBe(2);
    expect(refused.stderr).toContain('refettle bench sign-on');
  });
});

describe('Signing on', () => {
  beforeEach(async () => {
    await refettle(['sign-out']);
  });

  test('When nobody stands there, then reading is free, and whatever is written asks who', async () => {
    expect((await refettle(['unit', 'list', '--json'])).code).toBe(0);
    const refused = await visual();
    expect(refused).toMatchObject({ code: 2, stdout: '', by: [] });
    expect(refused.stderr).toContain('refettle bench sign-on NAME --pin-stdin');
  });

  test('When a name and a PIN are typed at the terminal, then what is recorded is by that person, and the PIN is not shown', async () => {
    const asked = await visual({
      keys: [
        ['your name', 'wil tarrow\r'],
        ['PIN', `${PIN}\r`],
      ],
    });
    expect(asked.by, asked.stderr).toEqual(['Wil Tarrow']);
    expect(asked.stderr).not.toContain(PIN);
    // Seen once: chosen from the list from now on, the last first.
    await refettle(['sign-out']);
    expect(
      (
        await visual({
          keys: [
            ['somebody else', '\r'],
            ['PIN', `${PIN}\r`],
          ],
        })
      ).by,
    ).toEqual(['Wil Tarrow']);
  });

  test('When the PIN is wrong twice, then it is asked again; the third time it ends', async () => {
    const slips = await visual({
      keys: [
        ['else', '\r'],
        ['PIN', '1379\r'],
        ['else', '\r'],
        ['PIN', `${PIN}\r`],
      ],
    });
    expect(slips.by, slips.stderr).toEqual(['Wil Tarrow']);
    expect(slips.stderr).toContain('The name or the PIN is wrong');
    expect(await signOn('Wil Tarrow', '1379')).toMatchObject({ code: 5, stdout: '' });
  });

  test('When the set minutes pass without a command, then the next one asks; one in between keeps the sign-on', async () => {
    // Six minutes here, for the server takes no clock that is more than ten ahead.
    const env = { REFETTLE_SIGN_ON_MINUTES: '6' };
    await signOn('Wil Tarrow', PIN, { env });
    expect((await visual({ later: 5, env })).code).toBe(0);
    expect((await visual({ later: 9, env })).code).toBe(0);
    expect((await visual({ later: 16, env })).code).toBe(2);
    await signOn('Wil Tarrow');
    expect(JSON.parse((await refettle(['whoami', '--json'], { later: 9 })).stdout)).toMatchObject({ user: { name: 'Wil Tarrow' } });
    expect(JSON.parse((await refettle(['whoami', '--json'], { later: 11 })).stdout)).toMatchObject({ user: null });
    await signOn('Wil Tarrow');
    // A clock that was set back makes no sign-on last.
    expect((await visual({ later: -1 })).code).toBe(2);
    expect((await visual({ later: 9, env: { REFETTLE_SIGN_ON_MINUTES: '5' } })).code).toBe(2);
    expect((await visual({ env: { REFETTLE_SIGN_ON_MINUTES: 'soon' } })).code).toBe(2);
    expect((await visual({ env: { REFETTLE_SIGN_ON_MINUTES: '0' } })).code).toBe(2);
  });

  test('When a run begins at a terminal, then it asks who although somebody stands there, and the run is that person’s', async () => {
    await signOn('Wil Tarrow');
    await signOn('Maren Holt');
    const { number } = await takeIn(server);
    const script = join(home, 'look.yaml');
    writeFileSync(
      script,
      'format: refettle.script\nversion: 1\nname: look\ntitle: A look\nfamily: heron-h6\nsteps:\n  - {id: visual, kind: inspect, title: Visual check, check: visual}\n',
    );
    // Maren signed on last and stands first; one down is Wil.
    const run = await refettle(['run', script, String(number), '--rig', 'sim:heron-good', '--unattended', '--json'], {
      keys: [
        ['somebody else', '\u001b[B\r'],
        ['PIN', `${PIN}\r`],
      ],
    });
    expect(run.code, run.stderr).toBe(0);
    const page = await server.ok('getUnit', { as: maren, params: { number } });
    expect(page.runs.map(({ by }) => by.name)).toEqual(['Wil Tarrow']);
    const pipe = await refettle(['run', script, String(number), '--rig', 'sim:heron-good', '--unattended', '--json']);
    expect(pipe.code, pipe.stderr).toBe(0);
  });

  test('When whoami and bench show are asked, then they say bench and person and ask for no PIN', async () => {
    expect((await refettle(['whoami'])).stdout).toMatch(/^Nobody is signed on.*\nbench 1, a shared bench of Millrace Mend/);
    await signOn('Maren Holt');
    expect(JSON.parse((await refettle(['whoami', '--json'])).stdout)).toMatchObject({
      bench: { name: 'bench 1' },
      user: { name: 'Maren Holt', role: 'lead' },
      offline: false,
    });
    expect((await refettle(['bench', 'show'])).stdout).toMatch(/signed on +Maren Holt, lead, until \d\d:\d\d.*\npeople +Maren Holt, lead/);
    expect((await refettle(['sign-out'])).stdout).toBe('Maren Holt is signed on no longer.\n');
  });

  test('When a technician stands there, then an override is refused; when a lead does, then it is by that lead', async () => {
    const { number } = await takeIn(server);
    const override = ['override', String(number), '--reason', 'the insulation tester is away', '--json'];
    await signOn('Wil Tarrow');
    expect((await refettle(override)).code).toBe(5);
    await signOn('Maren Holt');
    expect(JSON.parse((await refettle(override)).stdout)).toMatchObject({ by: { name: 'Maren Holt' } });
  });
});

describe('Without the network', () => {
  test('When the network is away, then those whom the bench has seen sign on, and all is sent in their names with none of them there', async () => {
    for (const name of ['Wil Tarrow', 'Maren Holt']) await signOn(name);
    const { number } = await takeIn(server);
    const unit = String(number);
    expect((await refettle(['measure', unit, 'visual', '--verdict', 'pass'])).code).toBe(0);
    await http.unplug();
    expect((await signOn('wil tarrow')).code).toBe(0);
    const repair = ['repair', unit, '--part', 'Drain pump', '--source', 'new', '--minutes', '30', '--cost', '24.50'];
    expect((await refettle(repair)).code).toBe(5);
    expect((await signOn('Maren Holt')).code).toBe(0);
    expect((await refettle(['measure', unit, 'visual', '--verdict', 'pass'])).code).toBe(5);
    const stranger = await signOn('Ines Marlow');
    expect(stranger.code).toBe(5);
    expect(stranger.stderr).toMatch(/It knows Maren Holt, Wil Tarrow\. Others sign on once while the server can be reached/);

    await http.plugIn();
    await refettle(['sign-out']);
    expect((await refettle(['sync'])).code).toBe(0);
    const page = await server.ok('getUnit', { as: maren, params: { number } });
    expect(page.events.slice(-2).map(({ kind, by }) => [kind, by.name])).toEqual([
      ['repair', 'Wil Tarrow'],
      ['inspection', 'Maren Holt'],
    ]);
  });

  test('When a PIN is guessed at without the network, then each wrong one makes the wait longer, also in a new process', async () => {
    await signOn('Wil Tarrow');
    await http.unplug();
    for (let tries = 0; tries < 3; tries += 1) expect((await signOn('Wil Tarrow', '1379')).stderr).toContain('The PIN is wrong');
    const fourth = await signOn('Wil Tarrow');
    expect(fourth.code).toBe(5);
    expect(fourth.stderr).toMatch(/Too many wrong PINs for Wil Tarrow\.\s+Wait (30|29|28|27|26|25) seconds/);
    // Setting the clock back gains nothing.
    expect((await signOn('Wil Tarrow', PIN, { later: -60 })).stderr).toContain('Too many wrong PINs');
    expect((await signOn('Wil Tarrow', '1379', { later: 1 })).stderr).toContain('The PIN is wrong');
    expect((await signOn('Wil Tarrow', PIN, { later: 1.8 })).stderr).toContain('Too many wrong PINs');
    expect((await signOn('Wil Tarrow', PIN, { later: 2.1 })).code).toBe(0);
    expect(kept('bench-people.json')).not.toContain('"wrong"');
    await http.plugIn();
  });

  test('When somebody left or has a new PIN, then the next contact drops them, and without the network they sign on no longer', async () => {
    const leaver = await server.addPerson('technician', 'Leaver Lime');
    await givePin(server, leaver);
    expect((await signOn('Leaver Lime')).code).toBe(0);
    expect(kept('bench-people.json')).toContain('Leaver Lime');
    await server.deps.db('people').where({ id: leaver.id }).update({ active: false });
    await server.ok('setPin', { as: maren, params: { id: wil.id }, body: { pin: '40719' } });
    await refettle(['whoami']);
    expect(kept('bench-people.json')).not.toMatch(/Leaver Lime|Wil Tarrow/);
    await http.unplug();
    for (const [name, pin] of [
      ['Leaver Lime', PIN],
      ['Wil Tarrow', PIN],
      ['Wil Tarrow', '40719'],
    ] as const)
      expect((await signOn(name, pin)).code).toBe(5);
    await http.plugIn();
    expect((await signOn('Wil Tarrow', '40719')).code).toBe(0);
  });
});

describe('Leaving', () => {
  test('When the bench is revoked, then the work is kept and the message says who must act', async () => {
    await signOn('Maren Holt');
    await server.ok('revokeBench', { as: maren, params: { id: bench.id } });
    const kept_ = await visual();
    expect(kept_.code).toBe(5);
    expect(kept_.stderr).toMatch(/A lead or an admin gives the bench a new token/);
    const { token } = await server.ok('renewBenchToken', { as: maren, params: { id: bench.id } });
    bench = { ...bench, token };
    expect((await joinIt()).code).toBe(0);
    expect((await refettle(['sync'])).code).toBe(0);
  });

  test('When the computer leaves, then token and verifiers are gone from it; what waits stays', async () => {
    const left = await refettle(['bench', 'leave', '--json']);
    expect(JSON.parse(left.stdout)).toEqual({ server: address, left: { id: bench.id, name: 'bench 1' }, waiting: 0 });
    for (const file of ['bench.json', 'bench-people.json', 'sign-on.json']) expect(() => kept(file)).toThrow();
    expect((await refettle(['whoami'])).code).toBe(5);
  });
});
