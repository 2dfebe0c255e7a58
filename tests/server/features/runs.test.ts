import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { Answer } from '../../../shared/api/routes.js';
import type { StepResult } from '../../../shared/script/run-log.js';
import { addHeron, newRepair, newRun, pass, shopFileText, takeIn } from '../../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
});
afterAll(() => server.close());

const send = (number: number, body: unknown) => server.send('recordRun', { params: { number }, as: server.people.technician, body });

test('When a bench log is stored, then its page has the steps without files, each capture’s answer and the faces, and the captures have pages of their own', async () => {
  const { number } = await takeIn(server);
  const run = newRun(server, 'h6-find');
  expect((await send(number, run)).body).toEqual({ id: run.id, verdict: 'pass' });

  const page = await server.ok('getRun', { as: server.people.sales, params: { id: run.id } });
  expect(page).toMatchObject({
    unit: { number, maker: 'Brindle', model: 'BW 714' },
    script: run.script,
    rig: run.rig,
    by: { name: 'Wil Tarrow' },
    interrupted: false,
  });
  const step = page.steps.find((one) => one.kind === 'capture');
  expect(step?.kind === 'capture' && step.file).toBe('');
  const captureId = step?.kind === 'capture' ? step.captureId : '';
  expect(page.answers[captureId]?.codes).toMatchObject([{ code: 'G5K3' }]);
  expect(Object.keys(page.faces)).toEqual(['G5K3']);

  const sent = run.steps.find((one) => one.kind === 'capture');
  const capture = await server.ok('getCapture', { as: server.people.sales, params: { id: captureId } });
  expect(capture).toMatchObject({
    runId: run.id,
    simulated: false,
    unit: { number },
    sheet: { family: 'heron-h6', edition: 1 },
    capture: { answer: { codes: [{ code: 'G5K3' }] } },
  });
  expect(capture.file).toBe(sent?.kind === 'capture' ? sent.file : undefined);
});

test('When a run is stored, then the unit’s history has its events in their order, each with its step', async () => {
  const { number } = await takeIn(server);
  const run = newRun(server, 'h6-find');
  await send(number, run).expect(201);
  const page = await server.ok('getUnit', { as: server.people.sales, params: { number } });
  expect(page.events.map(({ kind, stepId }) => [kind, stepId])).toEqual([
    ['intake', undefined],
    ['run began', undefined],
    ['inspection', 'visual'],
    ['reading', 'protective-conductor'],
    ['reading', 'insulation'],
    ['capture', 'lamps'],
    ['reading', 'drain-pump-winding'],
    ['note', 'remarks'],
    ['run ended', undefined],
  ]);
  expect(page.events.slice(1).every((event) => event.runId === run.id)).toBe(true);
  expect(page.runs).toMatchObject([{ id: run.id, script: 'h6-find', prove: false, verdict: 'pass', steps: 13 }]);
  expect(page.faces['G5K3']?.rows).toHaveLength(2);
});

test('When times come with an offset, then they are stored in UTC; a clock that is far off is refused where it stands', async () => {
  const { number } = await takeIn(server);
  const run = newRun(server, 'h6-mend');
  await send(number, { ...run, startedAt: '2026-03-05T09:40:00+01:00', endedAt: '2026-03-05T10:09:00.5+01:00' }).expect(201);
  const page = await server.ok('getRun', { as: server.people.sales, params: { id: run.id } });
  expect([page.startedAt, page.endedAt]).toEqual(['2026-03-05T08:40:00.000Z', '2026-03-05T09:09:00.500Z']);

  const next = newRun(server, 'h6-mend');
  for (const [change, pointer] of [
    [{ startedAt: '1999-12-31T23:59:59Z' }, '/startedAt'],
    [{ endedAt: '2026-03-05T09:10:00.001Z' }, '/endedAt'], // a millisecond more than 10 minutes ahead
    [{ startedAt: '0000-01-01T00:00:00Z' }, '/startedAt'],
    [{ startedAt: '2026-03-05T09:01:00Z', endedAt: '2026-03-05T09:00:00Z' }, '/endedAt'],
  ] as const) {
    expect(problemIn(await send(number, { ...next, ...change }))).toMatchObject({ status: 422, errors: [{ pointer }] });
  }
});

test('When log, script and sheet contradict each other, then it is refused and nothing of it is kept', async () => {
  const { number } = await takeIn(server);
  const run = newRun(server, 'h6-find');
  const script = run.script;
  const step = (id: string, change: (step: StepResult) => object) => run.steps.map((one) => (one.stepId === id ? change(one) : one));
  const wrongs: [object, number, string][] = [
    [{ script: { ...script, text: 'format: [' } }, 422, '/script/text'],
    [{ script: { ...script, text: script.text.replace('heron-h6', 'wren-w3') } }, 422, '/script/text'],
    [{ script: { ...script, text: 'a: &a [x]\nb: [*a,*a]\n' } }, 422, '/script/text'],
    [{ script: { ...script, name: 'h6-prove' } }, 422, '/script/name'],
    [{ script: { ...script, prove: true } }, 422, '/script/prove'],
    [{ steps: step('lamps', (one) => ({ ...one, file: 'nonsense' })) }, 422, '/steps/8/file'],
    [{ steps: step('lamps', (one) => ({ ...one, captureId: 'nonsense' })) }, 422, '/steps/8/captureId'],
    [{ steps: step('code', (one) => ({ ...one, captureId: run.id })) }, 422, '/steps/9/captureId'],
    [{ steps: step('visual', (one) => ({ ...one, kind: 'measure', inspection: undefined })) }, 422, '/steps/1/reading'],
    [{ steps: step('visual', (one) => ({ ...one, stepId: 'no-such-step' })) }, 403, ''],
    [{ steps: step('remarks', (one) => ({ ...one, stepId: 'visual' })) }, 403, ''],
  ];
  for (const [change, status, pointer] of wrongs) {
    const problem = problemIn(await send(number, { ...run, ...change }));
    expect(problem.status, JSON.stringify(problem)).toBe(status);
    expect(problem.errors?.map((error) => error.pointer)).toContain(pointer);
  }
  const page = await server.ok('getUnit', { as: server.people.sales, params: { number } });
  expect([page.events.length, page.runs.length]).toEqual([1, 0]);
  expect(await server.deps.db('captures').where({ run_id: run.id })).toEqual([]);
});

test('When one capture is sent in two runs, then the second is a conflict', async () => {
  const { number } = await takeIn(server);
  const run = newRun(server, 'h6-find');
  await send(number, run).expect(201);
  expect(problemIn(await send(number, { ...newRun(server, 'h6-find'), steps: run.steps })).status).toBe(409);
});

test('When the unit has no sheet, then no script can run on it', async () => {
  const unit = await takeIn(server, { family: undefined });
  expect(problemIn(await send(unit.number, newRun(server, 'h6-find')))).toMatchObject({
    status: 422,
    detail: expect.stringContaining('no service sheet') as unknown,
  });
  await server.ok('recordRepair', { params: { number: unit.number }, as: server.people.technician, body: newRepair(server) });
});

test('When a used part is fitted in a run, then its donor is looked up and says so', async () => {
  const donor = await takeIn(server);
  const { number } = await takeIn(server);
  const from = (fromUnit: number) =>
    newRun(server, 'h6-mend', {
      change: (step) => (step.kind === 'repair' ? { ...step, repair: { ...step.repair, partSource: { kind: 'used', fromUnit } } } : step),
    });
  expect(problemIn(await send(number, from(77_777)))).toMatchObject({
    status: 422,
    errors: [{ pointer: '/steps/1/repair/partSource/fromUnit' }],
  });
  await send(number, from(donor.number)).expect(201);
  const page = await server.ok('getUnit', { as: server.people.sales, params: { number: donor.number } });
  expect(page.events.at(-1)).toMatchObject({ kind: 'part removed', part: 'Drain pump', toUnit: number });
});

describe('A run that was going on while somebody wrote down a repair', () => {
  /** The repair is written down, by its own clock, a second after this step of the run. */
  const runWithRepairAfter = async (stepId: string, values: Partial<Record<string, number>>) => {
    const { number } = await takeIn(server);
    pass(server, 1);
    const run = newRun(server, 'h6-find', { values });
    const mended = run.steps.find((step) => step.stepId === stepId);
    pass(server, 10);
    const repair = { ...newRepair(server), at: new Date(Date.parse(mended?.endedAt ?? '') + 1000).toISOString() };
    await server.ok('recordRepair', { params: { number }, as: server.people.technician, body: repair });
    pass(server, 1);
    await send(number, run).expect(201);
    const page = await server.ok('getUnit', { as: server.people.sales, params: { number } });
    return { page, order: page.events.map(({ kind, stepId }) => stepId ?? kind) };
  };
  const ruleOf = (page: Answer<'getUnit'>, id: string) => page.readiness.rules.find((rule) => rule.id === id);

  test('When a check failed after the repair, then that fail counts; the dead tests before it do not', async () => {
    const { page, order } = await runWithRepairAfter('lamps', { 'drain-pump-winding': 900 });
    expect(order).toEqual([
      ...['intake', 'run began', 'visual', 'protective-conductor', 'insulation', 'lamps', 'repair'],
      ...['drain-pump-winding', 'remarks', 'run ended'],
    ]);
    expect(ruleOf(page, 'checks')).toMatchObject({ state: 'fail', evidence: expect.stringContaining('rain pump') as unknown });
    expect(ruleOf(page, 'electrical-safety')?.state).toBe('missing');
    expect(page.energising.open).toBe(false);
  });

  test('When a check failed or passed before the repair, then neither counts', async () => {
    const { page, order } = await runWithRepairAfter('drain-pump-winding', { 'drain-pump-winding': 900 });
    expect(order.slice(-4)).toEqual(['drain-pump-winding', 'repair', 'remarks', 'run ended']);
    expect(ruleOf(page, 'checks')?.state).toBe('missing');
    expect(ruleOf(page, 'no-code')?.state).toBe('missing');
  });
});

test('When the bench’s clock was set back during a run, then its steps stay in their order around the repair', async () => {
  const { number } = await takeIn(server);
  pass(server, 1);
  const beforeTheRun = new Date(server.time.now.getTime() - 60_000).toISOString();
  const run = newRun(server, 'h6-find', {
    change: (step) => (step.stepId === 'drain-pump-winding' ? { ...step, endedAt: beforeTheRun } : step),
  });
  const lamps = run.steps.find((step) => step.stepId === 'lamps');
  const at = new Date(Date.parse(lamps?.endedAt ?? '') - 10_000).toISOString();
  pass(server, 6);
  await server.ok('recordRepair', { params: { number }, as: server.people.technician, body: { ...newRepair(server), at } });
  await send(number, run).expect(201);
  const page = await server.ok('getUnit', { as: server.people.sales, params: { number } });
  expect(page.events.map(({ kind, stepId }) => stepId ?? kind).slice(-5)).toEqual([
    ...['repair', 'lamps', 'drain-pump-winding', 'remarks', 'run ended'],
  ]);
});

test('When two benches fit parts out of each other’s units at the same moment, then both are stored', async () => {
  const [one, two] = [await takeIn(server), await takeIn(server)];
  const swap = (to: number, fromUnit: number) =>
    server.send('recordRepair', {
      params: { number: to },
      as: server.people.technician,
      body: newRepair(server, { partSource: { kind: 'used', fromUnit } }),
    });
  for (let round = 0; round < 5; round += 1) {
    const answers = await Promise.all([swap(one.number, two.number), swap(two.number, one.number)]);
    expect(answers.map(({ status }) => status)).toEqual([201, 201]);
  }
});

test('When a sheet gets a new edition, then old captures keep the edition that decoded them', async () => {
  const { number } = await takeIn(server);
  const run = newRun(server, 'h6-find');
  await send(number, run).expect(201);
  pass(server, 20);
  const text = shopFileText('heron-h6.yaml')
    .replace('edition: 1', 'edition: 2')
    .replace('Water level does not fall in time', 'Water stays in');
  await server.ok('addSheet', { as: server.people.lead, body: { text } });
  const step = run.steps.find((one) => one.kind === 'capture');
  const capture = await server.ok('getCapture', {
    as: server.people.sales,
    params: { id: step?.kind === 'capture' ? step.captureId : '' },
  });
  expect(capture).toMatchObject({ sheet: { edition: 1 }, faces: { G5K3: { title: 'Water level does not fall in time' } } });
});

test('When the bench’s journal was damaged, then the run says so, and a fail and a used part found behind it are on the books', async () => {
  const { number } = await takeIn(server);
  const donor = await takeIn(server);
  const run = newRun(server, 'h6-find');
  const first = run.steps[0];
  if (!first) throw new Error('the script has steps');
  const { title, startedAt, endedAt } = first;
  const repair = { ...newRepair(server, { partSource: { kind: 'used', fromUnit: donor.number } }).repair };
  const found: StepResult[] = [{ stepId: 'mended', title, startedAt, endedAt, kind: 'repair', repair }];
  const damages = [{ line: 3, reason: 'its checksum is wrong', steps: 1, found }];
  pass(server, 30);
  await send(number, { ...run, damages }).expect(201);
  expect(await server.ok('getRun', { as: server.people.lead, params: { id: run.id } })).toMatchObject({ damages });
  const { events } = await server.ok('getUnit', { as: server.people.lead, params: { number } });
  expect(events.slice(0, 4).map(({ kind }) => kind)).toEqual(['intake', 'run began', 'note', 'repair']);
  const other = await server.ok('getUnit', { as: server.people.lead, params: { number: donor.number } });
  expect(other.events.at(-1)?.kind).toBe('part removed');
});
