import { BadInputError } from '../../shared/errors.js';
import type { InspectionBody, ReadingBody } from '../../shared/history/events.js';
import { settleInspection } from '../../shared/history/settle-reading.js';
import { formatLimits, formatReading, formatSpread } from '../../shared/measure/format-reading.js';
import { checksFor } from '../../shared/readiness/facts.js';
import { checkOf, energisingOfCheck } from '../../shared/script/energised.js';
import type { Step } from '../../shared/script/schema.js';
import type { Check, MeasuredCheck } from '../../shared/sheet/schema.js';
import { verdictSchema, type Verdict } from '../../shared/verdict.js';
import { mayBegin } from '../bench/may-begin.js';
import { takeReading, typedReading } from '../bench/take-reading.js';
import type { Technician } from '../bench/technician.js';
import { unitOnBench, type UnitOnBench } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { NobodyToAskError, UsageError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import { InstrumentError } from '../instruments/instrument-error.js';
import type { OpenRig } from '../instruments/rig.js';
import { keepAndSend, type Delivery } from '../journal/deliver.js';
import { liveOf } from '../live/live-of.js';
import { readingTold } from '../live/live-words.js';
import { wordsOf } from '../report-error.js';
import { COUNTS_DISCHARGED, DISCHARGE } from '../render/charge-words.js';
import { deliveryWords } from '../render/delivery-words.js';
import { printJson } from '../render/json.js';
import { readingLines } from '../render/reading-lines.js';
import { verdictText } from '../render/verdict.js';
import { unitLabel } from '../render/words.js';

export interface MeasureOptions {
  number: number;
  check: string;
  value?: string;
  accuracy?: string;
  resolution?: string;
  meter?: string;
  verdict?: string;
  note?: string;
  rig?: string;
  json?: boolean;
}

/** Takes one check of the unit's sheet: measured by the rig, typed in, or looked at. */
export async function runMeasure(options: MeasureOptions, context: Context): Promise<number> {
  const unit = await unitOnBench(context, options.number);
  const check = checkOf(unit.sheet, options.check);
  if (!check)
    throw new BadInputError(
      `the sheet ${unit.sheet.family} has no check '${options.check}'; it has ${checksFor(unit.facts)
        .map(({ id }) => id)
        .join(', ')}`,
    );
  return context.interruption.hold(() =>
    check.kind === 'inspect' ? lookAt(options, context, unit, check) : measure(options, context, unit, check),
  );
}

async function measure(options: MeasureOptions, context: Context, unit: UnitOnBench, check: MeasuredCheck): Promise<number> {
  if (options.verdict !== undefined) throw new UsageError(`--verdict: '${check.id}' is measured, its verdict comes from the reading`);
  const byHand = options.value !== undefined;
  if (byHand && (options.accuracy === undefined || options.resolution === undefined))
    throw new UsageError('--value needs --accuracy and --resolution: those of the meter that took it, as its data sheet has them');
  const rig = byHand ? undefined : await context.openRig(options.rig);
  try {
    const step: Step = { id: check.id, kind: 'measure', title: check.title, check: check.id };
    const mayIt = () => mayBegin({ context, unit, rig, step, caution: check.cautions.join(' ') || check.title, alreadyDone: byHand });
    const technician = await mayIt();
    if (!technician) return EXIT.notGood;
    const { value = '', accuracy = '', resolution = '', meter } = options;
    const live = liveOf(context);
    if (rig) {
      live.begins({ id: context.newId(), what: 'measure', unit, title: check.title, steps: [step], rig });
      live.stepBegins(step.id);
    }
    const reading = rig
      ? await readingOff(rig, technician, check, unit, context, mayIt)
      : typedReading(check, unit.sheet, { value, accuracy, resolution, meter });
    if (reading === undefined) return EXIT.notGood;
    await rig?.close();
    const id = context.newId();
    const at = context.now().toISOString();
    const base = entryBase(context, unit, check, id, at);
    const keep = (body: ReadingBody): Promise<Delivery> =>
      keepAndSend(context, { ...base, route: 'recordReading', body: { id, at, simulated: rig?.simulated === true, reading: body } });
    const uncounted = { ...reading, undischarged: true } as const;
    const left = await leftBy(check, technician, context).catch(async (error: unknown) => {
      await keep(uncounted);
      throw error;
    });
    const taken = left === 'charged' ? uncounted : reading;
    const delivery = await keep(taken);
    live.told(step.id, readingTold(taken), taken.judgement.verdict);
    // Told while the rest goes on, and waited for last: nobody at the bench waits for those who watch.
    const lastWord = live.ends('ended', taken.judgement.verdict);
    const code = await say(options, context, { check, verdict: taken.judgement.verdict, delivery, reading: taken });
    await lastWord;
    return firstExitCode([code, left === 'charged' ? EXIT.notGood : EXIT.good]);
  } finally {
    // Where it has not ended by itself.
    await liveOf(context).ends('failed');
    await rig?.close();
  }
}

/** A test that puts voltage on the machine ends with its discharge: whether that is done is asked before the reading is taken for one. */
async function leftBy(check: MeasuredCheck, technician: Technician, { stderr }: Context): Promise<'charged' | 'safe'> {
  if (energisingOfCheck(check) !== 'test voltage') return 'safe';
  stderr.say(DISCHARGE);
  if (!technician.attended || (await technician.hasDone(check.id, 'instruct', 'Discharged?'))) return 'safe';
  stderr.say(COUNTS_DISCHARGED);
  return 'charged';
}

/** A reading off the rig's meter; after a failure a person may try again. Undefined: the probes were not put on, or the caution was answered with no. */
async function readingOff(
  rig: OpenRig,
  technician: Technician,
  check: MeasuredCheck,
  { sheet }: UnitOnBench,
  { stderr }: Context,
  mayIt: () => Promise<Technician | undefined>,
): Promise<ReadingBody | undefined> {
  const meter = rig.meterInfo(check.quantity);
  for (;;) {
    if (meter && technician.attended) {
      stderr.say(`${check.title}, meter ${meter.id}`);
      if (!(await technician.hasDone(check.id, 'measure', 'Probes on?'))) return undefined;
    }
    try {
      return await takeReading(check, sheet, rig, technician, check.id);
    } catch (error) {
      if (!(error instanceof InstrumentError) || !technician.attended) throw error;
      stderr.say(`${wordsOf(error)}\nNothing was recorded.`);
      if (!(await technician.triesAgain(check.id, 'Measure again?'))) throw error;
      // Nobody knows what became of the machine meanwhile: its gate and its caution again.
      if (energisingOfCheck(check) !== 'dead' && !(await mayIt())) return undefined;
    }
  }
}

async function lookAt(
  options: MeasureOptions,
  context: Context,
  unit: UnitOnBench,
  check: Extract<Check, { kind: 'inspect' }>,
): Promise<number> {
  const step: Step = { id: check.id, kind: 'inspect', title: check.title, check: check.id };
  const rig = options.rig === undefined ? undefined : await context.openRig(options.rig);
  try {
    const technician = await mayBegin({ context, unit, rig, step, caution: check.cautions.join(' ') });
    if (!technician) return EXIT.notGood;
    if (options.verdict === undefined && !context.interactive && !rig?.hands)
      throw new NobodyToAskError(check.question, 'give it with --verdict');
    const seen = options.verdict === undefined ? await technician.looks(check.id, check.question) : given(options);
    const inspection = settleInspection({ checkId: check.id, title: check.title, ...seen }, unit.sheet);
    const id = context.newId();
    const at = context.now().toISOString();
    const delivery = await keepAndSend(context, {
      ...entryBase(context, unit, check, id, at),
      route: 'recordInspection',
      body: { id, at, simulated: rig?.simulated === true, inspection },
    });
    return await say(options, context, { check, verdict: inspection.verdict, delivery, inspection });
  } finally {
    await rig?.close();
  }
}

function given({ verdict, note }: MeasureOptions): Pick<InspectionBody, 'verdict' | 'note'> {
  const known = verdictSchema.exclude(['not done']).safeParse(verdict);
  if (!known.success) throw new UsageError(`--verdict: '${verdict}' is none of pass, fail, inconclusive`);
  return { verdict: known.data, ...(note === undefined ? {} : { note }) };
}

function entryBase({ server }: Context, { by, page }: UnitOnBench, check: Check, id: string, madeAt: string) {
  const { number } = page.unit;
  return { id, madeAt, server, by, what: `reading of ${unitLabel(number)} (${check.title})`, params: { number } };
}

interface Said {
  check: Check;
  verdict: Verdict;
  delivery: Delivery;
  reading?: ReadingBody;
  inspection?: InspectionBody;
}

async function say(options: MeasureOptions, context: Context, { check, verdict, delivery, reading, inspection }: Said): Promise<number> {
  const { stdout, stderr } = context;
  if (delivery.state !== 'sent') stderr.say(deliveryWords(delivery));
  const style = await stdout.style();
  if (options.json === true)
    printJson(context, {
      unit: options.number,
      check: check.id,
      verdict,
      sent: delivery.state === 'sent',
      ...(reading ? { reading } : { inspection }),
    });
  else if (reading && check.kind === 'measure') {
    const { judgement, resolution } = reading;
    const { value, unit, low, high, expandedUncertainty } = judgement;
    if (stdout.isTerminal) stdout.write(`${readingLines(reading, check, style).join('\n')}\n`);
    stdout.write(
      `${style.ink.bold(unitLabel(options.number))}  ${check.title}  ${formatReading(value, resolution, unit)} ${formatSpread(expandedUncertainty, resolution)}  ${formatLimits(low, high, unit, resolution)}  ${verdictText(verdict, style)}\n`,
    );
  } else stdout.write(`${style.ink.bold(unitLabel(options.number))}  ${check.title}  ${verdictText(verdict, style)}\n`);
  return firstExitCode([verdict === 'pass' ? EXIT.good : EXIT.notGood, delivery.state === 'sent' ? EXIT.good : EXIT.server]);
}
