// The gates that keep a bench from power, tried around by the API. Numbers are those of the product's list of gates.
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { RunLog, StepResult } from '../../shared/script/run-log.js';
import { captureFile } from '../helpers/bench-log.js';
import { addHeron, newCapture, newInspection, newReading, newRepair, newRun, pass, passDeadTests, takeIn } from '../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
});
afterAll(() => server.close());

const by = (number: number) => ({ params: { number }, as: server.people.technician });
const page = (number: number) => server.ok('getUnit', by(number));
const ruleOf = async (number: number, id: string) => (await page(number)).readiness.rules.find((rule) => rule.id === id);
const stepOf = (run: RunLog, id: string): StepResult => {
  const step = run.steps.find(({ stepId }) => stepId === id);
  if (!step) throw new Error(`no step ${id}`);
  return step;
};

describe('Gate 1, dead tests before power', () => {
  test('When nothing was tested, then neither lamps nor current may be taken, and the answer says what is missing and the way through', async () => {
    const { number } = await takeIn(server);
    const capture = problemIn(await server.send('recordCapture', { ...by(number), body: newCapture(server) }));
    expect(capture).toMatchObject({ status: 403, kind: 'gate' });
    expect(capture.errors?.map(({ reason }) => reason)).toEqual([
      'visual check is not done',
      'protective conductor is not done',
      'insulation is not done',
    ]);
    expect(capture.remedy).toContain('in this order');
    expect(
      problemIn(await server.send('recordReading', { ...by(number), body: newReading(server, 'protective-conductor-current') })).kind,
    ).toBe('gate');
    expect(
      problemIn(
        await server.send('recordRun', {
          ...by(number),
          body: { ...newRun(server, 'h6-find'), steps: newRun(server, 'h6-find').steps.slice(6, 10) },
        }),
      ).kind,
    ).toBe('gate');
    expect((await page(number)).events).toHaveLength(1); // nothing of it was kept
  });

  test('When a dead test is done before the one before it, then it may not begin', async () => {
    const { number } = await takeIn(server);
    expect(problemIn(await server.send('recordReading', { ...by(number), body: newReading(server, 'protective-conductor') })).kind).toBe(
      'gate',
    );
    await server.ok('recordInspection', { ...by(number), body: newInspection(server) });
    expect(problemIn(await server.send('recordReading', { ...by(number), body: newReading(server, 'insulation') })).kind).toBe('gate');
  });

  test('When a dead test fails, then nothing after it is let through, and a second try does not open it', async () => {
    const { number } = await takeIn(server);
    await server.ok('recordInspection', { ...by(number), body: newInspection(server) });
    const { event } = await server.ok('recordReading', { ...by(number), body: newReading(server, 'protective-conductor', 1.9) });
    expect(event.kind === 'reading' && event.reading.judgement.verdict).toBe('fail');
    await server.ok('recordReading', { ...by(number), body: newReading(server, 'protective-conductor') });
    const problem = problemIn(await server.send('recordReading', { ...by(number), body: newReading(server, 'insulation') }));
    expect(problem.errors).toEqual([{ pointer: '', reason: 'protective conductor: fail' }]);
  });

  test('When a lead overrides with a reason, then it opens, and the page says who and why; nobody else may, and not without one', async () => {
    const { number } = await takeIn(server);
    const body = { gate: 'dead tests', reason: 'insulation tester is away, cord was replaced' };
    expect((await server.send('recordOverride', { ...by(number), body })).status).toBe(403);
    expect(
      (await server.send('recordOverride', { params: { number }, as: server.people.lead, body: { ...body, reason: '          ' } })).status,
    ).toBe(422);
    await server.ok('recordOverride', { params: { number }, as: server.people.lead, body });
    expect((await page(number)).energising).toMatchObject({ open: true, override: { by: 'Maren Holt', reason: body.reason } });
    await server.ok('recordCapture', { ...by(number), body: newCapture(server) });
  });

  test('When the machine was mended, then dead tests and overrides from before no longer open it', async () => {
    const { number } = await takeIn(server);
    await passDeadTests(server, number);
    pass(server, 1);
    await server.ok('recordRepair', { ...by(number), body: newRepair(server) });
    expect((await server.send('recordCapture', { ...by(number), body: newCapture(server) })).status).toBe(403);
  });

  test('When dead tests from before the repair are sent after it, then they do not open the gate', async () => {
    const { number } = await takeIn(server);
    const late = { ...newInspection(server), at: server.time.now.toISOString() };
    const lateEarth = newReading(server, 'protective-conductor');
    const lateInsulation = newReading(server, 'insulation');
    pass(server, 5);
    await server.ok('recordRepair', { ...by(number), body: newRepair(server) });
    pass(server, 5);
    await server.ok('recordInspection', { ...by(number), body: late });
    await server.ok('recordReading', { ...by(number), body: lateEarth });
    await server.ok('recordReading', { ...by(number), body: lateInsulation });
    expect((await page(number)).energising.open).toBe(false);
    expect((await page(number)).events.map((event) => event.kind)).toEqual(['intake', 'inspection', 'reading', 'reading', 'repair']);
  });

  test('When the log says that an energised check was another one on a dead machine, then it is refused', async () => {
    const { number } = await takeIn(server);
    const run = newRun(server, 'h6-find');
    const winding = stepOf(run, 'drain-pump-winding');
    const current = newReading(server, 'protective-conductor-current').reading;
    const forged = { ...run, steps: [{ ...winding, reading: { ...current, condition: 'dead' } }] };
    expect(problemIn(await server.send('recordRun', { ...by(number), body: forged }))).toMatchObject({
      status: 422,
      errors: [{ pointer: '/steps/0/reading/checkId' }],
    });
  });

  test('When a reading says of itself that its machine was dead, then the sheet is believed and not the reading', async () => {
    const { number } = await takeIn(server);
    const body = newReading(server, 'protective-conductor-current');
    expect(
      (await server.send('recordReading', { ...by(number), body: { ...body, reading: { ...body.reading, condition: 'dead' } } })).status,
    ).toBe(403);
  });
});

describe('Gate 2, a caution has no default', () => {
  test('When an energised step comes without its caution, or after a no, then the log is refused', async () => {
    const { number } = await takeIn(server);
    for (const change of [
      (step: StepResult) => (step.stepId === 'power-caution' ? undefined : step),
      (step: StepResult) => (step.stepId === 'power-caution' && step.kind === 'caution' ? { ...step, answer: 'no' as const } : step),
    ]) {
      const problem = problemIn(await server.send('recordRun', { ...by(number), body: newRun(server, 'h6-find', { change }) }));
      expect(problem).toMatchObject({ status: 403, kind: 'gate', detail: expect.stringContaining('service-mode') as unknown });
    }
  });

  test('When the script itself has an energised step without a caution, then it is refused before anything is looked at', async () => {
    const { number } = await takeIn(server);
    const run = newRun(server, 'h6-find');
    const text = run.script.text.replace(/ {2}- \{id: power-caution.*\n/, '');
    const problem = problemIn(await server.send('recordRun', { ...by(number), body: { ...run, script: { ...run.script, text } } }));
    expect(problem).toMatchObject({
      status: 422,
      errors: [{ pointer: '/script/text', reason: expect.stringContaining('caution') as unknown }, expect.anything()],
    });
  });
});

describe('Gate 3, inconclusive is not pass', () => {
  test('When the bench says pass, then the server judges by the sheet’s limits and its own arithmetic', async () => {
    const { number } = await takeIn(server);
    const honest = newReading(server, 'heater', 31);
    const forged = {
      ...honest,
      reading: {
        ...honest.reading,
        judgement: { ...honest.reading.judgement, low: 0, high: 100, verdict: 'pass', conformanceProbability: 1 },
      },
    };
    const { event } = await server.ok('recordReading', { ...by(number), body: forged });
    expect(event).toMatchObject({ kind: 'reading', reading: { judgement: { low: 24, high: 29, verdict: 'fail' } } });
  });

  test('When steps are skipped or the run is cut short, then its verdict is not done', async () => {
    const { number } = await takeIn(server);
    const run = newRun(server, 'h6-find');
    const some = await server.ok('recordRun', { ...by(number), body: { ...run, steps: run.steps.slice(0, 3) } });
    expect(some.verdict).toBe('not done');
    pass(server, 20);
    const cut = await server.ok('recordRun', { ...by(number), body: { ...newRun(server, 'h6-find'), interrupted: true } });
    expect(cut.verdict).toBe('not done');
  });

  test('When the log gives expectations and verdicts of its own, then the captures decide', async () => {
    const { number } = await takeIn(server);
    const forge = (step: StepResult): StepResult =>
      step.kind === 'expect' ? { ...step, seen: 'ready blink only', verdict: 'pass' } : step;
    const run = newRun(server, 'h6-find', { panels: { lamps: 'ready blink' }, change: forge });
    expect((await server.ok('recordRun', { ...by(number), body: run })).verdict).toBe('inconclusive');
    const stored = await server.ok('getRun', { as: server.people.technician, params: { id: run.id } });
    expect(stored.steps.find((step) => step.kind === 'expect')).toMatchObject({ verdict: 'inconclusive', seen: 'no code' });

    const lenient = {
      ...newRun(server, 'h6-prove'),
      steps: newRun(server, 'h6-prove').steps.map((step) => (step.kind === 'expect' ? { ...step, expected: 'any' } : step)),
    };
    expect(
      problemIn(await server.send('recordRun', { ...by(number), body: lenient })).errors?.some(({ pointer }) =>
        pointer.endsWith('/expected'),
      ),
    ).toBe(true);
  });
});

describe('Gate 4, no code must be proved', () => {
  const proveWith = async (change: Parameters<typeof newRun>[2]) => {
    const { number } = await takeIn(server);
    await server.ok('recordRun', { ...by(number), body: newRun(server, 'h6-mend') });
    pass(server, 5);
    await server.ok('recordRun', { ...by(number), body: newRun(server, 'h6-prove', change) });
    pass(server, 25);
    return number;
  };

  test('When the proof shows a code, then it is a fail and stays one after a good capture', async () => {
    const number = await proveWith({ panels: { lamps: 'G5K3' } });
    expect(await ruleOf(number, 'no-code')).toMatchObject({ state: 'fail', evidence: 'shows G5K3' });
    await server.ok('recordCapture', { ...by(number), body: newCapture(server) });
    expect((await ruleOf(number, 'no-code'))?.state).toBe('fail');
  });

  test('When the codes were not cleared after the repair, then nothing is proved', async () => {
    const forgotten = ({ stepId, title, startedAt, endedAt }: StepResult): StepResult => ({
      ...{ stepId, title, startedAt, endedAt },
      ...{ kind: 'skipped', stepKind: 'clear', judged: false, reason: 'forgotten' },
    });
    const number = await proveWith({ change: (step) => (step.kind === 'clear' ? forgotten(step) : step) });
    expect(await ruleOf(number, 'no-code')).toMatchObject({ state: 'missing', evidence: 'stored codes were not cleared after the repair' });
    // The log calls the step unjudged; the script decides.
    expect((await page(number)).runs.at(-1)?.verdict).toBe('not done');
  });

  test('When the capture is too short, then it is inconclusive', async () => {
    const recordedWhileProving = new Date(server.time.now.getTime() + 6 * 60_000).toISOString();
    const short = captureFile('ready blink', { capturedAt: recordedWhileProving })
      .split('\n')
      .filter((line) => !line.startsWith('[') || Number(/\d+/.exec(line)?.[0]) < 15_000_000)
      .map((line) => (line.startsWith('{"end"') ? '{"end":15000000}' : line))
      .join('\n');
    const number = await proveWith({ change: (step) => (step.kind === 'capture' ? { ...step, file: short } : step) });
    expect(await ruleOf(number, 'no-code')).toMatchObject({ state: 'inconclusive', evidence: '15 s long, the sheet asks for 20 s' });
  });
});

describe('Gate 5, no retesting until it passes', () => {
  test('When a failed check is measured again without a repair, then the fail stands', async () => {
    const { number } = await takeIn(server);
    await server.ok('recordReading', { ...by(number), body: newReading(server, 'heater', 31) });
    await server.ok('recordReading', { ...by(number), body: newReading(server, 'heater') });
    expect(await ruleOf(number, 'checks')).toMatchObject({ state: 'fail', evidence: 'Heater: fail' });
  });
});

describe('Gate 11, a licensed person only', () => {
  test('When a fridge is on the bench, then no script runs on it and nothing energises it, override or not', async () => {
    const { number } = await takeIn(server, { appliance: 'fridge' });
    await server.ok('recordOverride', {
      params: { number },
      as: server.people.lead,
      body: { gate: 'dead tests', reason: 'a licensed person is here' },
    });
    for (const name of ['h6-find', 'h6-mend'] as const) {
      expect(problemIn(await server.send('recordRun', { ...by(number), body: newRun(server, name) }))).toMatchObject({
        status: 403,
        kind: 'gate',
      });
    }
    expect((await server.send('recordCapture', { ...by(number), body: newCapture(server) })).status).toBe(403);
  });
});
