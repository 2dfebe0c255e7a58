import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { StoppedError } from '../errors.js';
import type { OpenRig } from '../instruments/rig.js';

/** A hand over a sensor changes its level by at least this share of full scale (common practice, no published source). */
const COVERED_CHANGE = 0.05;
/** And by at least this much more than any other sensor's, which the same hand shades. */
const CLEARLY_MORE = 1.5;

/**
 * Which sensor a hand covers: the one whose level changed most since before, if it changed clearly. Levels 0 to 1 of full scale.
 *
 * @example coveredSensor([0.4, 0.4], [0.4, 0.02]) // 1
 */
export function coveredSensor(before: readonly number[], now: readonly number[]): number | undefined {
  const changes = before.map((level, index) => Math.abs(level - (now[index] ?? level)));
  const order = changes.map((_change, index) => index).sort((a, b) => (changes[b] ?? 0) - (changes[a] ?? 0));
  const [first, second] = order;
  if (first === undefined || (changes[first] ?? 0) < COVERED_CHANGE) return undefined;
  return second === undefined || (changes[first] ?? 0) >= CLEARLY_MORE * (changes[second] ?? 0) ? first : undefined;
}

/** Levels are averaged over so long: longer than mains flicker, shorter than patience. */
const SETTLE_MS = 400;
const MOST_SAMPLES = 400;

/**
 * Before the first capture of a run the technician covers the sensors one by one, in panel order, and the terminal checks that the
 * right one answers (contract, section 6). A probe that hangs one lamp off makes a wrong code, not a missing one.
 */
export async function checkSensors(context: Context, rig: OpenRig, sheet: Sheet): Promise<void> {
  const { prompt, stderr } = context;
  const probe = await rig.openProbe(sheet.lamps.map((lamp) => lamp.id));
  const recent: (readonly number[])[] = [];
  const stop = new AbortController();
  const onInterrupt = (): void => stop.abort();
  context.interruption.signal.addEventListener('abort', onInterrupt);
  let failure: Error | undefined;
  const reading = (async () => {
    try {
      for await (const event of probe.read(stop.signal)) {
        if (event.kind !== 'sample') continue;
        recent.push(event.levels.map((level) => level / probe.scaleMax));
        if (recent.length > MOST_SAMPLES) recent.shift();
      }
    } catch (error) {
      failure = error instanceof Error ? error : new Error(String(error));
    }
  })();
  const settledLevels = async (): Promise<number[]> => {
    recent.length = 0;
    await context.sleep(SETTLE_MS);
    if (failure !== undefined) throw failure;
    return sheet.lamps.map((_lamp, index) => recent.reduce((sum, levels) => sum + (levels[index] ?? 0), 0) / Math.max(1, recent.length));
  };
  try {
    stderr.say('           Before the first capture: is each sensor on its own lamp? The machine stays dark for this.');
    // With every sensor free: the hand is still on the last lamp when the next one is asked for.
    let free = await settledLevels();
    for (const [index, lamp] of sheet.lamps.entries()) {
      for (;;) {
        const keys = [
          { key: ' ', word: 'covered' },
          { key: 'q', word: 'leave' },
        ] as const;
        const key = await prompt.key({
          message: `           Cover the sensor on ${lamp.label}, keep it covered`,
          keys,
          instead: 'run it at a terminal',
        });
        if (key === 'q') throw new StoppedError();
        const covered = coveredSensor(free, await settledLevels());
        if (covered === index) break;
        const seen = covered === undefined ? 'No sensor changed clearly.' : `The sensor for ${sheet.lamps[covered]?.label ?? ''} changed.`;
        stderr.write(`           ${seen} Move the sensors, or correct their order in the rig file.\n`);
        await prompt.key({
          message: '           Take the hand away',
          keys: [{ key: ' ', word: 'it is away' }],
          instead: 'run it at a terminal',
        });
        free = await settledLevels();
      }
    }
    stderr.say('           Every sensor is on its lamp.');
  } finally {
    context.interruption.signal.removeEventListener('abort', onInterrupt);
    stop.abort();
    await reading;
  }
  if (failure) throw failure;
}
