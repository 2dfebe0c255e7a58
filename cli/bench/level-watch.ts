import type { Context } from '../context.js';
import { StoppedError } from '../errors.js';
import type { ProbeEvent } from '../instruments/rig.js';

/** Levels are averaged over so long: longer than mains flicker, shorter than patience. */
const SETTLE_MS = 400;
const MOST_SAMPLES = 400;
/** Fewer say nothing of a level; a probe on a bad cable, or one that is just coming back, needs longer for them. */
const LEAST_SAMPLES = 10;
const LOOK_AGAIN_MS = 50;

/** The light levels of a probe while somebody's hand is near it. */
export interface LevelWatch {
  /**
   * The mean level of each column from now on for a moment, 0 to 1 of full scale. Waits for samples: what nobody saw is no level.
   * Throws what the probe fails with; StoppedError where it is read no longer.
   */
  settled(): Promise<number[]>;
  /** Stops the probe; throws what it failed with. */
  close(): Promise<void>;
}

/** Reads a probe in the background until it is closed or Ctrl-C is pressed. */
export function watchLevels(
  context: Context,
  probe: { read(signal: AbortSignal): AsyncGenerator<ProbeEvent, void, undefined> },
  { columns, scaleMax }: { columns: number; scaleMax: number },
): LevelWatch {
  const recent: (readonly number[])[] = [];
  const stop = new AbortController();
  const onInterrupt = (): void => stop.abort();
  context.interruption.signal.addEventListener('abort', onInterrupt);
  let failure: Error | undefined;
  let ended = false;
  const reading = (async () => {
    try {
      for await (const event of probe.read(stop.signal)) {
        if (event.kind !== 'sample') continue;
        recent.push(event.levels.map((level) => level / scaleMax));
        if (recent.length > MOST_SAMPLES) recent.shift();
      }
    } catch (error) {
      failure = error instanceof Error ? error : new Error(String(error));
    } finally {
      ended = true;
    }
  })();
  return {
    async settled() {
      recent.length = 0;
      await context.sleep(SETTLE_MS);
      // A probe that stays silent fails by itself, after as long as its rig waits for it.
      while (recent.length < LEAST_SAMPLES && !ended) await context.sleep(LOOK_AGAIN_MS);
      if (failure !== undefined) throw failure;
      if (recent.length < LEAST_SAMPLES) throw new StoppedError();
      return Array.from(
        { length: columns },
        (_unused, index) => recent.reduce((sum, levels) => sum + (levels[index] ?? 0), 0) / recent.length,
      );
    },
    async close() {
      context.interruption.signal.removeEventListener('abort', onInterrupt);
      stop.abort();
      await reading;
      if (failure) throw failure;
    },
  };
}
