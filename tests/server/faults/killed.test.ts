// kill -9 at random moments of runs of the real program against a real server: whatever was said to be recorded is there, once.
import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { homeOf } from '../../../cli/home.js';
import { HERON_GOOD } from '../../../cli/instruments/simulated/scenarios/heron-good.js';
import { logOf, readRunJournal } from '../../../cli/journal/run-journal.js';
import { keepSession } from '../../../cli/session.js';
import { holdsFile } from '../../../shared/script/run-log.js';
import { addHeron, newUnit } from '../../helpers/factories.js';
import { faults } from '../../helpers/faults.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type TestServer } from '../../helpers/test-server.js';
import { theProgram } from '../../helpers/the-program.js';

const repository = new URL('../../..', import.meta.url);
const fileOf = (script: string): string => new URL(`server/seed/shop/${script}.yaml`, repository).pathname;
/** The short script most of the time, and the one with the calibration run: their steps. */
const SCRIPTS = [
  { name: 'h6-find', steps: 13 },
  { name: 'h6-prove', steps: 20 },
  { name: 'h6-find', steps: 13 },
] as const;
/** The lamps of a whole proof run in about a second. */
const SPEED = 400;

let server: TestServer;
let http: OverHttp;
let folder: string;
let rig: string;

beforeAll(async () => {
  server = await startTestServer({ shop: { demo: true } });
  server.deps.clock = () => new Date();
  await addHeron(server);
  http = await overHttp(server.app);
  folder = mkdtempSync(join(tmpdir(), 'refettle-killed-'));
  rig = join(folder, 'quick.yaml');
  writeFileSync(rig, HERON_GOOD.replace(/^speed: .*$/m, `speed: ${String(SPEED)}`));
});
afterAll(async () => {
  await http.unplug();
  await server.close();
  rmSync(folder, { recursive: true, force: true });
});

/** So many milliseconds after it began, after its first words, or after the run's last step, where it is closed and sent. */
type Kill = { afterMs: number; from: 'start' | 'first words' | RegExp };

/** The program in a process of its own, killed when it is told. */
function refettle(
  home: string,
  args: string[],
  kill?: Kill,
): Promise<{ killed: boolean; code: number | null; stderr: string; stdout: string; tookMs: number; wordsMs: number }> {
  const env = { PATH: process.env['PATH'], LANG: 'C.UTF-8', REFETTLE_HOME: home, REFETTLE_SERVER: http.address };
  const child = spawn(process.execPath, [...theProgram, ...args], { cwd: repository, env, stdio: ['ignore', 'pipe', 'pipe'] });
  const startedMs = performance.now();
  let wordsMs = Infinity;
  let stderr = '';
  let stdout = '';
  const killLater = (): void => {
    if (kill) setTimeout(() => child.kill('SIGKILL'), kill.afterMs).unref();
  };
  if (kill?.from === 'start') killLater();
  child.stderr.on('data', (chunk: Buffer) => {
    if (stderr === '') {
      wordsMs = performance.now() - startedMs;
      if (kill?.from === 'first words') killLater();
    }
    const before = stderr;
    stderr += chunk.toString();
    if (kill?.from instanceof RegExp && kill.from.test(stderr) && !kill.from.test(before)) killLater();
  });
  child.stdout.on('data', (chunk: Buffer) => (stdout += chunk.toString()));
  return new Promise((done) =>
    child.once('close', (code, signal) => {
      done({ killed: signal === 'SIGKILL', code, stderr, stdout, tookMs: performance.now() - startedMs, wordsMs });
    }),
  );
}

const journalsIn = (home: string): string[] =>
  existsSync(join(home, 'journal')) ? readdirSync(join(home, 'journal')).filter((name) => name.endsWith('.ndjson')) : [];
/** The steps whose results stand on the screen, in order: a line with its number, its kind and its title. */
const saidToBeDone = (stderr: string): number =>
  [...stderr.matchAll(/^ ?\d{1,2} (?:inspect|measure|expect|watch|clear|note|repair|capture) .*(?:pass|fail|ended)/gm)].length;

async function runUntilItIsThere(
  home: string,
  script: string,
  number: number,
  killNext: (killed: number) => Kill | undefined,
  tookMs: (ms: number) => void,
): Promise<{ kills: number; snapshot: string; hadEnded: number }> {
  let kills = 0;
  let hadEnded = 0;
  let snapshot = '';
  let said = 0;
  for (;;) {
    const [journal] = journalsIn(home);
    const kill = killNext(kills);
    const args = journal === undefined ? ['run', fileOf(script), String(number)] : ['resume', journal.replace('.ndjson', '')];
    const outcome = await refettle(home, [...args, '--rig', `sim:${rig}`, '--unattended'], kill);
    if (outcome.killed) kills += 1;
    else {
      expect([0, 1], outcome.stderr).toContain(outcome.code);
      if (journal === undefined) tookMs(outcome.tookMs - outcome.wordsMs);
    }
    said += saidToBeDone(outcome.stderr);
    const [left] = journalsIn(home);
    if (left !== undefined) {
      const text = readFileSync(join(home, 'journal', left), 'utf8');
      // Nothing that stood in the journal before is gone or another.
      expect(text.startsWith(snapshot)).toBe(true);
      snapshot = text;
      const written = readRunJournal(text);
      expect(written?.damage).toBeUndefined();
      if (written?.end) hadEnded += 1;
      // What the screen said was in the journal before.
      expect((written?.results ?? []).length).toBeGreaterThanOrEqual(said);
    }
    const over = left === undefined && existsSync(join(home, 'journal', 'closed'));
    const waits = existsSync(join(home, 'journal', 'outbox')) ? readdirSync(join(home, 'journal', 'outbox')) : [];
    if (over && outcome.killed && waits.length > 0) hadEnded += 1;
    if (over || (!outcome.killed && left === undefined)) return { kills, snapshot, hadEnded };
  }
}

test(
  'When the program is killed at random moments, then after resuming nothing recorded is missing and nothing stands twice',
  { timeout: 3_600_000 },
  async () => {
    const { count, below, random } = faults('kill -9 in a run', 4);
    const person = server.people.technician;
    let kills = 0;
    let runs = 0;
    let cuts = 0;
    let ended = 0;
    /** How long the work of a whole run takes here, once it has said its first words: a guess, until one was let be. */
    const workMs: Record<string, number> = { 'h6-find': 2500, 'h6-prove': 5000 };
    while (kills < count) {
      const { name, steps } = SCRIPTS[runs % SCRIPTS.length] ?? SCRIPTS[0];
      runs += 1;
      const home = mkdtempSync(join(folder, 'home-'));
      const { token, ...user } = person;
      keepSession(homeOf({ REFETTLE_HOME: home }), { server: http.address, token, user });
      const { number } = await server.ok('takeInUnit', { as: person, body: newUnit() });
      const killNext = (killed: number): Kill | undefined => {
        // Some right after the start, most once it works; some of the time it is let go on to its end.
        if (kills + killed >= count || random() < 0.15) return undefined;
        if (random() < 0.2) return { from: new RegExp(`^ ?${String(steps)} `, 'm'), afterMs: below(80) };
        return random() < 0.15 ? { from: 'start', afterMs: below(1500) } : { from: 'first words', afterMs: below(workMs[name] ?? 0) };
      };
      const { kills: times, snapshot, hadEnded } = await runUntilItIsThere(home, name, number, killNext, (ms) => (workMs[name] = ms));
      kills += times;
      ended += hadEnded;

      // Whatever still waits goes now; a second time does no harm.
      for (let round = 0; round < 2; round += 1) expect((await refettle(home, ['sync'])).code).toBe(0);
      const closed = readdirSync(join(home, 'journal', 'closed'));
      expect(closed).toHaveLength(1);
      const text = readFileSync(join(home, 'journal', 'closed', closed[0] ?? ''), 'utf8');
      expect(text.startsWith(snapshot)).toBe(true);
      const written = readRunJournal(text);
      if (!written) throw new Error('the journal was not read');
      const log = logOf(homeOf({ REFETTLE_HOME: home }), written);
      cuts += log.steps.filter(({ kind }) => kind === 'cut').length;

      const page = await server.ok('getUnit', { as: person, params: { number } });
      expect(page.runs.map(({ id }) => id)).toEqual([log.id]);
      const run = await server.ok('getRun', { as: person, params: { id: log.id } });
      const facts = ({ stepId, kind, startedAt, endedAt }: { stepId: string; kind: string; startedAt: string; endedAt: string }) => ({
        stepId,
        kind,
        startedAt,
        endedAt,
      });
      expect(run.steps.map(facts)).toEqual(log.steps.map(facts));
      expect(run.people.map(({ how }) => how)).toEqual(log.people.map(({ how }) => how));
      // Every step of the script once; a caution again only behind a return, a cut only before its step.
      const own = run.steps.filter(({ kind }) => kind !== 'cut' && kind !== 'caution').map(({ stepId }) => stepId);
      expect(new Set(own).size).toBe(own.length);
      expect(new Set(run.steps.filter(({ kind }) => kind !== 'cut').map(({ stepId }) => stepId)).size).toBe(steps);
      expect(run.interrupted).toBe(false);
      expect(page.events.filter(({ kind }) => kind === 'run began')).toHaveLength(1);
      expect(page.events.filter(({ kind }) => kind === 'run ended')).toHaveLength(1);
      // Each reading and capture left its event, and each capture's file is there to be looked at.
      const measured = (kind: string): number => log.steps.filter((step) => step.kind === kind).length;
      expect(page.events.filter(({ kind }) => kind === 'reading')).toHaveLength(measured('measure'));
      for (const step of log.steps.filter(holdsFile)) {
        const capture = await server.ok('getCapture', { as: person, params: { id: step.captureId } });
        expect(capture.file).toBe(step.file);
      }
      // Times never run backwards.
      const times_ = log.steps.map(({ endedAt }) => Date.parse(endedAt));
      expect(times_).toEqual([...times_].sort((a, b) => a - b));
      rmSync(home, { recursive: true, force: true });
    }
    process.stdout.write(
      `${String(kills)} kills in ${String(runs)} runs, ${String(cuts)} captures cut, ${String(ended)} killed between their end and the server's answer; all finished, all stored once\n`,
    );
  },
);
