// The whole way through the real program and the real server, on simulated instruments: find, mend, prove, tag; and without the network.
import { execFile } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { hashPassword } from '../../../server/auth/password.js';
import { setPassword } from '../../../server/auth/people-store.js';
import { runProgram } from '../../../cli/program.js';
import { unitSchema } from '../../../shared/api/units.js';
import { benchTerminal } from '../../helpers/bench-terminal.js';
import { addHeron, rulesSeen } from '../../helpers/factories.js';
import { theProgram } from '../../helpers/the-program.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type TestServer } from '../../helpers/test-server.js';

const repository = new URL('../../..', import.meta.url);
const shop = (name: string): string => new URL(`server/seed/shop/${name}.yaml`, repository).pathname;
const PASSWORD = 'a password for the test';

let server: TestServer;
let http: OverHttp;
let address: string;
let home: string;

beforeAll(async () => {
  server = await startTestServer({ shop: { demo: true } });
  // The bench's clock is the machine's own: server and bench tell the same time here.
  server.deps.clock = () => new Date();
  home = mkdtempSync(join(tmpdir(), 'refettle-e2e-'));
  await setPassword(server.deps.db, server.people.technician.id, await hashPassword(PASSWORD), new Date());
  await addHeron(server);
  http = await overHttp(server.app);
  address = http.address;
});
afterAll(async () => {
  await http.unplug();
  await server.close();
  rmSync(home, { recursive: true, force: true });
});

interface Outcome {
  code: number;
  stdout: string;
  stderr: string;
}

/** The program in this process: the same streams, files and server, without its start. */
async function inProcess(args: string[]): Promise<Outcome> {
  const bench = benchTerminal({ home, env: { REFETTLE_SERVER: address } });
  return { code: await runProgram(args, bench.context), stdout: bench.stdout(), stderr: bench.stderr() };
}

/** The program as a process of its own. */
function refettle(args: string[], { input = '' }: { input?: string } = {}): Promise<Outcome> {
  return new Promise((done) => {
    const env = { PATH: process.env['PATH'], LANG: 'C.UTF-8', REFETTLE_HOME: home, REFETTLE_SERVER: address };
    const child = execFile(process.execPath, [...theProgram, ...args], { cwd: repository, env }, (error, stdout, stderr) => {
      done({ code: error === null ? 0 : typeof error.code === 'number' ? error.code : -1, stdout, stderr });
    });
    child.stdin?.end(input);
  });
}

async function takeIn(serial: string): Promise<number> {
  const { code, stdout, stderr } = await inProcess([
    ...[
      'unit',
      'new',
      '--appliance',
      'washing machine',
      '--maker',
      'Brindle',
      '--model',
      'BW 714',
      '--serial',
      serial,
      '--class',
      'I',
      '--mass',
      '68',
    ],
    ...['--family', 'heron-h6', '--complaint', 'stands full of water', '--cost', '12.50', '--json'],
  ]);
  expect([code, stderr]).toEqual([0, '']);
  const unit = unitSchema.parse(JSON.parse(stdout));
  expect(unit.costMinor).toBe(1250);
  return unit.number;
}
const rig = ['--rig', 'sim:heron-mend'];

describe('A machine from the gate to its tag, through the terminal', () => {
  test('When nobody is signed in, then it exits 5; after signing in, the token is for its owner only', async () => {
    expect((await refettle(['unit', 'list'])).code).toBe(5);
    const wrong = await refettle(['sign-in', '--email', 'wil.tarrow@millrace.example', '--password-stdin'], { input: 'not it\n' });
    expect(wrong.code).toBe(5);
    const right = await refettle(['sign-in', '--email', 'wil.tarrow@millrace.example', '--password-stdin'], { input: `${PASSWORD}\n` });
    expect(right).toMatchObject({ code: 0, stderr: '' });
    expect(right.stdout).not.toContain(PASSWORD);
    expect(statSync(join(home, 'token.json')).mode & 0o777).toBe(0o600);
    expect((await refettle(['whoami'])).stdout).toContain('Wil Tarrow, technician');
  });

  test('When the drain pump is at fault, then it is found, mended, proved, signed off and tagged', { timeout: 240_000 }, async () => {
    const number = await takeIn('7143 0968 2251');
    const unit = String(number).padStart(4, '0');

    const find = await refettle(['run', shop('h6-find'), unit, ...rig]);
    expect(find.code, find.stderr).toBe(1);
    expect(find.stdout).toMatch(/measure {2}Drain pump winding +96\.4 Ω ±0\.9 +140 to 180 +✕ fail/);
    expect(find.stdout).toMatch(/Ended ✕ fail.*Written down here, and sent\. +exit 1/);

    const mend = await refettle(['run', shop('h6-mend'), unit, ...rig, '--json']);
    expect(mend.code, mend.stderr).toBe(1);
    expect(JSON.parse(mend.stdout)).toMatchObject({ unit: number, script: 'h6-mend', verdict: 'inconclusive', sent: true });

    const notReady = await refettle(['tag', unit]);
    expect(notReady.code).toBe(1);
    expect(notReady.stdout).toContain('0 of 5 rules met');

    const prove = await refettle(['run', shop('h6-prove'), unit, ...rig]);
    expect(prove.code, prove.stderr).toBe(0);
    expect(prove.stdout).toContain('4 of 5 rules met');
    expect(prove.stdout).toContain('_ four eyes: no sign-off');

    await server.ok('signOff', { as: server.people.lead, params: { number }, body: await rulesSeen(server, number) });
    const pdf = join(home, 'tag.pdf');
    const tag = await refettle(['tag', unit, '--pdf', pdf]);
    expect(tag.code, tag.stderr).toBe(0);
    expect(tag.stdout).toContain('READY   SAMPLE');
    expect(tag.stdout).toContain(`tag ${unit}-1`);
    expect(tag.stdout).toMatch(/Says what this shop tested\. Certifies no compliance\. +exit 0/);
    expect(readFileSync(pdf).subarray(0, 5).toString()).toBe('%PDF-');

    const page = await server.ok('getUnit', { as: server.people.lead, params: { number } });
    expect(page.runs.map(({ script, verdict }) => [script, verdict])).toEqual(
      expect.arrayContaining([
        ['h6-find', 'fail'],
        ['h6-mend', 'inconclusive'],
        ['h6-prove', 'pass'],
      ]),
    );
    expect(page.stage).toBe('signed off');
  });

  test('When the serial is on the books already, then it is warned of, and taken in only with a reason', async () => {
    const again = [
      'unit',
      'new',
      '--appliance',
      'washing machine',
      '--maker',
      'Brindle',
      '--model',
      'BW 714',
      '--serial',
      '7143 0968 2251',
      '--class',
      'I',
      '--complaint',
      'back again',
    ];
    const refused = await inProcess(again);
    expect(refused).toMatchObject({ code: 2, stdout: '' });
    expect(refused.stderr).toMatch(/--same-serial/);
    expect((await inProcess([...again, '--same-serial', 'bought back'])).code).toBe(0);
    expect((await inProcess(['sync', '--status'])).stdout).toContain('Nothing waits');
  });

  test('When it came in without a control family, then intake says how to give it one, once', async () => {
    const plate = ['--appliance', 'washing machine', '--maker', 'Brindle', '--model', 'BW 714', '--serial', '7143 0042', '--class', 'I'];
    const taken = await inProcess(['unit', 'new', ...plate, '--complaint', 'does nothing']);
    const number = /refettle unit family (\d+) FAMILY/.exec(taken.stderr)?.[1] ?? '';
    expect((await inProcess(['unit', 'family', number, 'plover-p4'])).code).toBe(5);
    expect(await inProcess(['unit', 'family', number, 'heron-h6'])).toEqual({
      code: 0,
      stdout: `No. ${number} goes by the sheet of heron-h6 from now on.\n`,
      stderr: '',
    });
    const again = await inProcess(['unit', 'family', number, 'heron-h6', '--json']);
    expect(again).toMatchObject({ code: 5, stdout: '' });
    expect(again.stderr).toContain('goes by the sheet of heron-h6 already');
  });
});

describe('Without the network', () => {
  test(
    'When the network goes away, then the bench goes on, the gates know what was done, and sync stores each thing once',
    { timeout: 120_000 },
    async () => {
      const number = await takeIn('7143 0001');
      const unit = String(number);
      // The bench has seen the unit and its sheet.
      expect((await inProcess(['measure', unit, 'visual', '--verdict', 'pass'])).code).toBe(0);
      await http.unplug();

      const find = await inProcess(['run', shop('h6-find'), unit, ...rig]);
      // A failed run whose result still waits is 1, and says that it waits (contract, section 5).
      expect(find.code, find.stderr).toBe(1);
      expect(find.stderr).toContain('refettle sync');
      const mend = await inProcess(['repair', unit, '--part', 'Drain pump', '--source', 'new', '--minutes', '30', '--cost', '24.50']);
      expect(mend.code).toBe(5);
      // The repair that only this bench knows of shuts the gate again: dead tests come first.
      const capture = await inProcess(['capture', unit, '--seconds', '5', ...rig]);
      expect(capture.code).toBe(1);
      expect(capture.stderr).toContain('A safety gate is shut');

      const status = await inProcess(['sync', '--status']);
      expect(status.code).toBe(5);
      expect(status.stdout).toContain('bench run h6-find');
      expect(status.stdout).toContain('repair of');
      expect((await inProcess(['sync'])).code).toBe(5);

      await http.plugIn();
      expect(await inProcess(['sync'])).toMatchObject({ code: 0 });
      const page = await server.ok('getUnit', { as: server.people.lead, params: { number } });
      expect(page.runs).toHaveLength(1);
      expect(page.events.filter(({ kind }) => kind === 'repair')).toMatchObject([{ repair: { part: 'Drain pump', costMinor: 2450 } }]);
      expect(await inProcess(['sync'])).toMatchObject({ code: 0, stdout: 'Nothing waits on this bench.\n' });
    },
  );
});

describe('Safety at the terminal', () => {
  test('When a real rig meets a caution and nobody is there, then the run ends with 2 before a port is opened', async () => {
    const number = await takeIn('7143 0002');
    const file = join(home, 'real-rig.yaml');
    writeFileSync(
      file,
      'format: refettle.rig\nversion: 1\nname: bench 2\ninstruments:\n  - {id: P-01, kind: light-probe, port: /dev/not-there}\n',
    );
    const run = await inProcess(['run', shop('h6-find'), String(number), '--rig', file, '--unattended']);
    expect(run).toMatchObject({ code: 2, stdout: '' });
    expect(run.stderr).toContain('no port was opened');
    const page = await server.ok('getUnit', { as: server.people.lead, params: { number } });
    expect(page.runs).toEqual([]);
  });

  test('When a meter gives no reading, then it exits 4 and nothing is recorded', async () => {
    const number = await takeIn('7143 0003');
    const measured = await inProcess(['measure', String(number), 'heater', '--rig', 'sim:heron-flaky']);
    expect(measured).toMatchObject({ code: 4, stdout: '' });
    const page = await server.ok('getUnit', { as: server.people.lead, params: { number } });
    expect(page.events.map(({ kind }) => kind)).toEqual(['intake']);
  });

  test('When a reading is typed in, then it is judged by the sheet with that meter’s accuracy', async () => {
    const number = await takeIn('7143 0004');
    const typed = await inProcess([
      'measure',
      String(number),
      'heater',
      '--value',
      '24.1',
      '--accuracy',
      '0.8%+3',
      '--resolution',
      '0.1',
      '--meter',
      'H-1',
      '--json',
    ]);
    // U = 2 x (0.8 % of 24.1 + 3 x 0.1)/√3 = 0.57 (contract, section 4): 0.1 above the limit of 24 can't be decided.
    expect(typed.code).toBe(1);
    expect(JSON.parse(typed.stdout)).toMatchObject({ check: 'heater', verdict: 'inconclusive', sent: true });
    expect(
      (await inProcess(['measure', String(number), 'heater', '--value', '24,1', '--accuracy', '0.8%+3', '--resolution', '0.1'])).code,
    ).toBe(3);
  });
});
