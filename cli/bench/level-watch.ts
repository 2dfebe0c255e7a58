import type { Context } from '../context.js';
import type { ProbeEvent } from '../instruments/rig.js';

/** Levels are averaged over so long: longer than mains flicker, shorter than patience. */
const SETTLE_MS = 400;
const MOST_SAMPLES = 400;

/** The light levels of a probe while somebody's hand is near it. */
export interface LevelWatch {
  /** The mean level of each column from now on for a moment, 0 to 1 of full scale. Throws what the probe fails with. */
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
  const reading = (async () => {
    try {
      for await (const event of probe.read(stop.signal)) {
        if (event.kind !== 'sample') continue;
        recent.push(event.levels.map((level) => level / scaleMax));
        if (recent.length > MOST_SAMPLES) recent.shift();
      }
    } catch (error) {
      failure = error instanceof Error ? error : new Error(String(error));
    }
  })();
  return {
    async settled() {
      recent.length = 0;
      await context.sleep(SETTLE_MS);
      if (failure !== undefined) throw failure;
      return Array.from(
        { length: columns },
        (_unused, index) => recent.reduce((sum, levels) => sum + (levels[index] ?? 0), 0) / Math.max(1, recent.length),
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
