// The menu: each flow in this process, by the keys a person presses; and once as the real program on a pseudo-terminal.
import { spawn } from 'node:child_process';
import { chmodSync, mkdirSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { waitingFor } from '../../../cli/menu/places.js';
import { shellLine } from '../../../cli/menu/shell-words.js';
import { runProgram } from '../../../cli/program.js';
import { benchTerminal, signedIn, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { addHeron, takeIn } from '../../helpers/factories.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type TestServer } from '../../helpers/test-server.js';
import { theProgram } from '../../helpers/the-program.js';

const ENTER = '\r';
const ESCAPE = '\u001b';
const CTRL_C = '\u0003';
const repository = new URL('../../..', import.meta.url).pathname;

let server: TestServer;
let http: OverHttp;
let address: string;
let unit: string;
let bench: BenchTerminal;

beforeAll(async () => {
  server = await startTestServer({ shop: { demo: true } });
  server.deps.clock = () => new Date();
  await addHeron(server);
  http = await overHttp(server.app);
  address = http.address;
});
afterAll(async () => {
  await http.unplug();
  await server.close();
});
beforeEach(async () => {
  unit = String((await takeIn(server)).number).padStart(4, '0');
  bench = atBench(address);
});
afterEach(() => bench.remove());

function atBench(at: string, home?: string): BenchTerminal {
  const made = benchTerminal({ terminal: true, env: { REFETTLE_SERVER: at }, ...(home === undefined ? {} : { home }) });
  signedIn(made, server.people.technician);
  return made;
}

/** Presses the number of a line of the list, and Enter when that line is the one; the first one is from the start. */
const picks = (number: number, name: string): void => {
  if (number > 1) bench.when(`${number}. ${name}`, String(number));
  bench.when(`❯ ${number}. ${name}`, ENTER);
};
/** Types into the list that finds, and takes what is found. */
const finds = (question: string, typed: string): void => void bench.when(question, typed).when(`❯ ${typed}`, ENTER);
const leaves = (): void => void bench.when('back to the menu', ENTER).when('What now', ESCAPE);

describe('The menu', () => {
  test('When a check is measured from it, then the command is shown, done, and the verdict is on the unit’s history', async () => {
    picks(5, 'Measure');
    finds('Which unit', unit);
    picks(1, 'Visual check');
    bench.when('pass', 'p');
    leaves();
    expect(await runProgram([], bench.context), bench.stderr()).toBe(0);
    expect(bench.stderr()).toContain(`$ refettle measure ${unit} visual\n`);
    expect(bench.stdout()).toContain('Visual check  ■ pass');
    const page = await server.ok('getUnit', { as: server.people.lead, params: { number: Number(unit) } });
    expect(page.events.map(({ kind }) => kind)).toEqual(['intake', 'inspection']);
  });

  test('When a run is started from it, then script and rig are asked for, and the script is named in the command', async () => {
    mkdirSync(join(bench.home, 'scripts'));
    writeFileSync(
      join(bench.home, 'scripts', 'a-quick-look.yaml'),
      'format: refettle.script\nversion: 1\nname: a-quick-look\ntitle: A look\nfamily: heron-h6\nsteps:\n  - {id: visual, kind: inspect, title: Visual check, check: visual}\n',
    );
    picks(2, 'Start a run');
    finds('Which unit', unit);
    picks(1, 'a-quick-look');
    picks(2, 'sim:heron-good');
    bench.when('pass', 'p');
    leaves();
    expect(await runProgram([], bench.context), bench.stderr()).toBe(0);
    expect(bench.stderr()).toContain(`$ refettle run a-quick-look ${unit} --rig sim:heron-good\n`);
    expect(bench.stdout()).toContain('Ended ■ pass');
  });

  test('When a scanner types a unit’s number and its Enter in one piece, then that unit is taken', async () => {
    picks(7, 'Readiness tag');
    bench.when('Which unit', `${unit}${ENTER}`);
    leaves();
    expect(await runProgram([], bench.context), bench.stderr()).toBe(0);
    expect(bench.stderr()).toContain(`$ refettle tag ${unit}\n`);
  });

  test('When Escape is pressed in a list of a list, then each press goes back one', async () => {
    picks(1, 'Units waiting for me');
    finds('Units waiting for you', unit);
    bench.when('6. Its readiness tag', ESCAPE).when('Units waiting for you', ESCAPE).when('9. Sign out (Wil Tarrow)', ESCAPE);
    expect(await runProgram([], bench.context), bench.stderr()).toBe(0);
    expect(bench.stderr()).not.toContain('$ refettle');
    expect(bench.left()).toBe(0);
  });

  test('When Ctrl-C is pressed in a command, then the menu is there again; in the menu, then it leaves with 130', async () => {
    picks(6, 'Take in a unit');
    bench.when('Appliance', CTRL_C).when('back to the menu', ENTER).when('What now', CTRL_C);
    expect(await runProgram([], bench.context), bench.stderr()).toBe(130);
    expect(bench.stderr()).toContain('$ refettle unit new\n');
    expect(bench.stderr()).toContain('stopped by Ctrl-C');
    expect(bench.left()).toBe(1);
    expect(bench.raw()).toBe(0);
  });

  test('When the server is away, then the units are those of last time, and that is said', async () => {
    picks(7, 'Readiness tag');
    bench.when('Which unit', ESCAPE).when('What now', ESCAPE);
    expect(await runProgram([], bench.context), bench.stderr()).toBe(0);
    const { home } = bench;
    bench = atBench('http://127.0.0.1:65534', home);
    picks(7, 'Readiness tag');
    finds('Which unit', unit);
    leaves();
    expect(await runProgram([], bench.context), bench.stderr()).toBe(0);
    expect(bench.stderr()).toMatch(/can't be reached: these are the\s+units as\s+they were on/);
    expect(bench.stderr()).toContain(`$ refettle tag ${unit}\n`);
    expect(bench.stderr()).toContain('exit 5');
  });

  test('When something fails on the way, then it is said and the menu is there again', async () => {
    bench.remove();
    bench = atBench('http://127.0.0.1:65534');
    picks(4, 'Capture lamps');
    bench.when('REFETTLE_SERVER', '').when('What now', ESCAPE);
    expect(await runProgram([], bench.context), bench.stderr()).toBe(0);
  });

  test('When the terminal can’t move its cursor, then the menu is refused with a word; without a terminal it is wrong usage', async () => {
    const dumb = benchTerminal({ terminal: true, env: { TERM: 'dumb' } });
    expect(await runProgram([], dumb.context)).toBe(2);
    expect(dumb.stderr()).toMatch(/refettle\s+--help lists the commands/);
    dumb.remove();
    const pipe = benchTerminal();
    expect([await runProgram([], pipe.context), pipe.stdout()]).toEqual([2, '']);
    pipe.remove();
  });

  test('When it is asked who a unit waits for, then the bench has what is open and the sales desk what is ready', () => {
    const units = (['intake', 'repair', 'signed off', 'sold', 'returned'] as const).map((stage, at) => ({
      number: at + 1,
      machine: 'x',
      stage,
    }));
    expect(waitingFor('technician', units).map(({ stage }) => stage)).toEqual(['intake', 'repair', 'returned']);
    expect(waitingFor('lead', units).map(({ stage }) => stage)).toEqual(['intake', 'repair', 'returned']);
    expect(waitingFor('sales', units).map(({ stage }) => stage)).toEqual(['signed off']);
  });
});

describe('The program on a pseudo-terminal', () => {
  test(
    'When the menu is gone through with keys, then it does what they say, Ctrl-C comes back once, and the terminal is as it was',
    { timeout: 90_000 },
    async () => {
      const file = join(bench.home, 'refettle');
      const program = theProgram.map((part) =>
        part === 'tsx' ? import.meta.resolve(part) : part.startsWith('-') ? part : resolve(repository, part),
      );
      // What stands behind it in the shell shows the exit code and that the terminal echoes again.
      writeFileSync(file, `#!/bin/sh\nstty cols 80 rows 24\n${shellLine([process.execPath, ...program])}\necho "ended with $?"\nstty -a\n`);
      chmodSync(file, 0o755);
      const env = {
        PATH: process.env['PATH'],
        LANG: 'C.UTF-8',
        TERM: 'xterm',
        NO_COLOR: '1',
        REFETTLE_HOME: bench.home,
        REFETTLE_SERVER: address,
      };
      const child = spawn('socat', [`EXEC:${file},pty,setsid,ctty,stderr`, 'STDIO'], { env, stdio: ['pipe', 'pipe', 'pipe'] });
      const screen = { seen: '', heard: 0 };
      const steps: [says: string, press: string][] = [
        ['7. Readiness tag', '7'],
        ['❯ 7. Readiness tag', ENTER],
        ['Which unit', unit],
        [`❯ ${unit}`, ENTER],
        ['back to the menu', ENTER],
        ['6. Take in a unit', '6'],
        ['❯ 6. Take in a unit', ENTER],
        ['Appliance', CTRL_C],
        ['back to the menu', ENTER],
        ['What now', CTRL_C],
      ];
      const answer = (): void => {
        const [says, press] = steps[0] ?? [];
        const at = says === undefined ? -1 : screen.seen.indexOf(says, screen.heard);
        if (says === undefined || press === undefined || at < 0) return;
        screen.heard = at + says.length;
        steps.shift();
        // A hand is not quicker than that.
        setTimeout(() => (child.stdin.write(press), answer()), 80);
      };
      // A character of several bytes may come in two pieces.
      child.stdout.setEncoding('utf8').on('data', (text: string) => ((screen.seen += text), answer()));
      // Ended here, so that what stands on the screen is shown where it hangs.
      const patience = setTimeout(() => child.kill(), 80_000);
      const code = await new Promise((ended) => child.once('close', ended));
      clearTimeout(patience);
      expect(steps, screen.seen).toEqual([]);
      expect(code).toBe(0);
      expect(screen.seen).toContain(`$ refettle tag ${unit}`);
      expect(screen.seen).toContain('0 of 5 rules met');
      expect(screen.seen).toContain('ended with 130');
      expect(screen.seen.slice(screen.seen.indexOf('ended with'))).toMatch(/(?<!-)\bicanon\b[\s\S]*(?<!-)\becho\b/);
    },
  );
});
