import { writeFileSync } from 'node:fs';
import type { DecodeAnswer } from '../../shared/decode/answer.js';
import { decodeCapture, isReadable } from '../../shared/decode/decode-capture.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import { readSheet } from '../../shared/sheet/read-sheet.js';
import { keySource, MOST_KEY_LAMPS, probeSource, type LampSource } from '../bench/lamp-source.js';
import { mayBegin } from '../bench/may-begin.js';
import { textOf } from '../bench/read-script.js';
import { recordLamps } from '../bench/record-lamps.js';
import { checkSensors } from '../bench/sensor-check.js';
import { unitOnBench, type UnitOnBench } from '../bench/unit-on-bench.js';
import { watching } from '../bench/watchers.js';
import type { Context } from '../context.js';
import { NobodyToAskError, UsageError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import { notWritable, readIfThere } from '../home.js';
import { InstrumentError } from '../instruments/instrument-error.js';
import type { OpenRig } from '../instruments/rig.js';
import { captureFileOf, captureText, readablePart } from '../journal/capture-file.js';
import { keepAndSend } from '../journal/deliver.js';
import { liveOf } from '../live/live-of.js';
import { deliveryWords } from '../render/delivery-words.js';
import { answerLines } from '../render/answer-lines.js';
import { printJson } from '../render/json.js';
import { unitLabel } from '../render/words.js';

export interface CaptureOptions {
  number: number;
  seconds?: number;
  rig?: string;
  keys?: boolean;
  file?: string;
  sheet?: string;
  out?: string;
  json?: boolean;
}

const CAUTION = 'Mains on, moving parts, hot water. Lid or door shut, hands off, residual-current protection on.';

/** What was recorded, and whether it came to its own end. */
interface Recorded {
  id: string;
  file: string;
  fromFile: boolean;
  interrupted: boolean;
  /** The instrument failed meanwhile: what came until then counts, for a code that was shown is a code (gate 4). */
  failure?: InstrumentError;
}

/** Records the lamps of a unit, by probe or by keys, or takes a capture that was recorded before. */
export async function runCapture(options: CaptureOptions, context: Context): Promise<number> {
  if (options.keys === true && (options.file !== undefined || options.rig !== undefined))
    throw new UsageError('--keys goes without --rig and --file: the lamps come from one of them');
  if (options.keys === true && !context.interactive) throw new NobodyToAskError('Who taps the lamps?', 'run it at a terminal');
  if (options.file === undefined && options.seconds === undefined && !context.interactive)
    throw new NobodyToAskError('How long shall it record?', 'give it with --seconds');
  const sheet = options.sheet === undefined ? undefined : readSheet(textOf(options.sheet, 'service sheet'), options.sheet);
  const unit = await unitOnBench(context, options.number, sheet);
  const recorded = options.file === undefined ? await record(options, context, unit) : fromFile(options.file, context);
  if (recorded === undefined) return EXIT.notGood;

  try {
    if (options.out !== undefined) writeOut(options.out, recorded.file);
    const answer = decodeCapture(readCapture(recorded.file), unit.sheet);
    const code = await keepAndSay(options, context, unit, recorded, answer);
    if (recorded.failure) throw recorded.failure;
    return code;
  } finally {
    // Kept, sent and said first: nothing waits for those who watch.
    await liveOf(context).ends(recorded.failure ? 'failed' : recorded.interrupted ? 'stopped' : 'ended');
  }
}

function writeOut(out: string, file: string): void {
  try {
    writeFileSync(out, file);
  } catch (error) {
    throw notWritable(out, error);
  }
}

function fromFile(file: string, context: Context): Recorded {
  const text = textOf(file, 'capture');
  readCapture(text, file);
  return { id: context.newId(), file: text, fromFile: true, interrupted: false };
}

/** Undefined: a gate is shut or the caution was answered with no; that was said. */
async function record(options: CaptureOptions, context: Context, unit: UnitOnBench): Promise<Recorded | undefined> {
  const { sheet } = unit;
  const rig = options.keys === true ? undefined : await context.openRig(options.rig);
  try {
    const step = { id: 'capture', kind: 'capture', title: 'The lamps', seconds: options.seconds ?? 3600 } as const;
    const technician = await mayBegin({ context, unit, rig, step, caution: CAUTION });
    if (!technician) return undefined;
    const id = context.newId();
    const live = liveOf(context);
    return await context.interruption.hold(async () => {
      live.begins({ id, what: 'capture', unit, title: step.title, steps: [step], rig });
      live.stepBegins(step.id);
      const source = await sourceOf(rig, context, unit, options);
      const recording = recordLamps({
        context,
        captureId: id,
        unit: options.number,
        sheet,
        source,
        seconds: options.seconds,
        watcher: watching({ context, sheet, attended: technician.attended, byKeys: options.keys === true }),
      });
      try {
        const { ended } = await recording;
        return { id, file: captureText(context.home, id), fromFile: false, interrupted: ended === 'interrupted' };
      } catch (error) {
        const file = readablePart(readIfThere(captureFileOf(context.home, id)) ?? '');
        if (!(error instanceof InstrumentError) || file === '' || readCapture(file).timesUs.length === 0) throw error;
        return { id, file, fromFile: false, interrupted: false, failure: error };
      }
    });
  } catch (error) {
    await liveOf(context).ends('failed');
    throw error;
  } finally {
    await rig?.close();
  }
}

async function sourceOf(rig: OpenRig | undefined, context: Context, { sheet }: UnitOnBench, { keys }: CaptureOptions): Promise<LampSource> {
  if (!rig || keys === true) {
    if (sheet.lamps.length > MOST_KEY_LAMPS) context.stderr.say(`Only the first ${MOST_KEY_LAMPS} lamps of the panel have a key.`);
    return keySource(sheet);
  }
  if (!rig.simulated) await checkSensors(context, rig, sheet);
  rig.hands?.lampsShow('capture', 'capture');
  return probeSource(rig, sheet);
}

async function keepAndSay(
  options: CaptureOptions,
  context: Context,
  unit: UnitOnBench,
  recorded: Recorded,
  answer: DecodeAnswer,
): Promise<number> {
  const { id, file, fromFile } = recorded;
  const at = context.now().toISOString();
  const delivery = await keepAndSend(context, {
    route: 'recordCapture',
    id,
    madeAt: at,
    server: context.server,
    by: unit.by,
    what: `capture of ${unitLabel(options.number)}`,
    params: { number: options.number },
    body: { id, file, fromFile, at },
  });
  if (delivery.state !== 'sent') context.stderr.say(deliveryWords(delivery));
  if (options.json === true) printJson(context, { id, unit: options.number, ...answer, sent: delivery.state === 'sent' });
  else {
    const style = await context.stdout.style();
    const sent = delivery.state === 'sent' ? 'Written down here, and sent.' : 'Written down here; not sent yet.';
    context.stdout.write(
      `${style.ink.bold(unitLabel(options.number))}  ${Math.round(answer.durationS)} s, ${answer.samples} samples\n${answerLines(answer, unit.sheet, style).join('\n')}\n${sent}\n`,
    );
  }
  return firstExitCode([
    recorded.interrupted ? EXIT.stopped : EXIT.good,
    isReadable(answer) ? EXIT.good : EXIT.notGood,
    delivery.state === 'sent' ? EXIT.good : EXIT.server,
  ]);
}
