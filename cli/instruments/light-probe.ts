import { parseScpiError } from '../../shared/measure/scpi-error.js';
import { DamagedLinesError, GarbageError, ProbeSilentError, type InstrumentError } from './instrument-error.js';
import { isSampleLine, parseSampleLine } from './sample-line.js';
import { SampleTimeline, type ProbeEvent } from './sample-timeline.js';
import { ScpiConversation } from './scpi-conversation.js';
import type { Transport } from './transport.js';

export const COUNT_QUERY = 'SENSe:LAMP:COUNt?';
const START = 'INITiate:CONTinuous ON';
export const STOP = 'INITiate:CONTinuous OFF';
/** No probe has more sensors than a panel has lamps, with room to spare. */
const MOST_SENSORS = 64;
/** Without a line for this long the probe is asked once more to send (it may have started again), then given up. */
const SILENCE_MS = 1500;
/** Lines that are all damaged for so long are no bad cable any more. */
const DAMAGED_ONLY_MS = 5000;
/** Events nobody has fetched yet; beyond it the port is paused. */
const MOST_WAITING_EVENTS = 20_000;

export interface LightProbeOptions {
  sampleRateHz: number;
  scaleMax: number;
  /** The bench's clock in microseconds; a simulated one runs faster. */
  nowUs: () => number;
  /** Without a line for so long the probe is reminded, and after as long again given up; the usual time unless given. */
  silenceMs?: number | undefined;
}

export interface LightProbe {
  readonly identification: string;
  readonly sensorCount: number;
  /**
   * Samples and gaps from now on, until `signal` aborts. Ends by stopping the probe. One reader at a time. A `timeline` that was begun
   * before the port went away is gone on with.
   */
  read(signal: AbortSignal, timeline?: SampleTimeline): AsyncGenerator<ProbeEvent, void, undefined>;
  /** Stops the probe and closes the port. */
  close(): Promise<void>;
}

/** How many sensors an answer to COUNT_QUERY says; undefined where it says nothing of the kind. */
export function sensorCountOf(answer: string): number | undefined {
  const count = Number(answer);
  return Number.isInteger(count) && count >= 1 && count <= MOST_SENSORS ? count : undefined;
}

/** Stops a probe that may still be sending, falls into step with it, and asks how many sensors it has. */
export async function openLightProbe(transport: Transport, options: LightProbeOptions): Promise<LightProbe> {
  const conversation = new ScpiConversation(transport, { passOver: isSampleLine });
  await conversation.tell(STOP);
  const { text: identification } = await conversation.identify();
  const answer = await conversation.ask(COUNT_QUERY);
  const sensorCount = sensorCountOf(answer);
  if (sensorCount === undefined) throw new GarbageError(transport, COUNT_QUERY, answer);

  const stop = async (): Promise<void> => {
    // Asking for errors afterwards lets the samples that are still on their way run out. A probe that is gone needs no stopping.
    await conversation
      .tell(STOP)
      .then(() => conversation.errors())
      .catch(() => undefined);
  };
  return {
    identification,
    sensorCount,
    read: (signal, timeline = new SampleTimeline(options.sampleRateHz)) =>
      readSamples({ transport, conversation, sensorCount, signal, timeline, stop, ...options }),
    close: async () => {
      await stop();
      await transport.close();
    },
  };
}

interface Reading extends LightProbeOptions {
  transport: Transport;
  conversation: ScpiConversation;
  sensorCount: number;
  signal: AbortSignal;
  timeline: SampleTimeline;
  stop: () => Promise<void>;
}

async function* readSamples(reading: Reading): AsyncGenerator<ProbeEvent, void, undefined> {
  const { transport, conversation, sensorCount, signal, timeline, stop, scaleMax, nowUs, silenceMs = SILENCE_MS } = reading;
  const waiting: ProbeEvent[] = [];
  let gone: InstrumentError | undefined;
  let lines = 0;
  /** Lines since the last whole one, and when that was. */
  let damagedInARow = 0;
  let lastWholeMs: number;
  let wake = (): void => undefined;
  let paused = false;

  const subscriptions = [
    transport.onLine((line) => {
      // An answer of its error queue is no damaged sample.
      if (parseScpiError(line) !== undefined) return;
      lines += 1;
      const sample = parseSampleLine(line, sensorCount, scaleMax);
      damagedInARow = sample === undefined ? damagedInARow + 1 : 0;
      if (sample !== undefined) lastWholeMs = performance.now();
      waiting.push(...timeline.push(sample, nowUs()));
      if (waiting.length > MOST_WAITING_EVENTS && !paused) {
        transport.pause();
        paused = true;
      }
      wake();
    }),
    transport.onClose((reason) => {
      gone = reason;
      wake();
    }),
  ];
  const onAbort = (): void => wake();
  signal.addEventListener('abort', onAbort);
  try {
    if (signal.aborted) return;
    lastWholeMs = performance.now();
    await conversation.tell(START);
    let remindersLeft = 1;
    for (;;) {
      const batch = waiting.splice(0);
      if (paused) {
        transport.resume();
        paused = false;
      }
      yield* batch;
      if (waiting.length > 0) continue;
      if (signal.aborted) break;
      if (gone) throw gone;
      const heard = lines;
      await new Promise<void>((resolve) => {
        const timer = setTimeout(resolve, silenceMs);
        wake = () => {
          clearTimeout(timer);
          resolve();
        };
      });
      const damagedOnlyMs = performance.now() - lastWholeMs;
      if (damagedInARow > 0 && damagedOnlyMs > DAMAGED_ONLY_MS && !signal.aborted && gone === undefined)
        throw new DamagedLinesError(transport, damagedInARow, Math.round(damagedOnlyMs / 1000));
      if (lines > heard) remindersLeft = 1;
      else if (!signal.aborted && gone === undefined) {
        if (remindersLeft === 0) {
          const answers = await conversation.errors().then(
            () => true,
            () => false,
          );
          if (lines > heard) continue;
          throw new ProbeSilentError(transport, (2 * silenceMs) / 1000, answers);
        }
        remindersLeft -= 1;
        await conversation.tell(START);
      }
    }
    yield* timeline.finish();
  } finally {
    signal.removeEventListener('abort', onAbort);
    for (const unsubscribe of subscriptions) unsubscribe();
    if (paused) transport.resume();
    await stop();
  }
}
