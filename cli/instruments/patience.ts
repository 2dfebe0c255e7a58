import { StoppedError } from '../errors.js';
import { DisconnectedError, InstrumentError, PortMissingError } from './instrument-error.js';

/** How a rig waits for an instrument that went away in the middle of its work. */
export interface Patience {
  /** A line for people: what is awaited, and for how long. */
  say(line: string): void;
  /** Ctrl-C. */
  readonly signal: AbortSignal;
}

export interface Wait extends Patience {
  /** How long at most. */
  seconds: number;
  /** How often the port is looked for. */
  tryEveryMs: number;
  /** What becomes of the work when it is back: `it is asked again`. */
  then: string;
}

/** An operator looks up after so long; more lines would only push the others off the screen. */
const SAY_EVERY_MS = 10_000;
/** How often a port is looked for: a system needs about a second to set up what was plugged in. */
export const USUAL_TRY_EVERY_MS = 300;

/**
 * Waits until an instrument that was unplugged can be opened again. Undefined: `stop` aborted meanwhile.
 *
 * Throws a StoppedError at Ctrl-C; at the end of its patience what stood in the way last, or that it did not come back.
 */
export async function waitForReturn<T>(
  gone: DisconnectedError,
  open: () => Promise<T>,
  wait: Wait,
  stop?: AbortSignal,
): Promise<T | undefined> {
  const { instrument, port } = gone;
  const startedMs = performance.now();
  let saidMs = startedMs;
  let inTheWay: InstrumentError | undefined;
  wait.say(`${gone.message}. Waiting up to ${wait.seconds} s for it to come back: plug it in again, or stop with Ctrl-C.`);
  for (;;) {
    await pause(wait.tryEveryMs, [wait.signal, stop]);
    if (wait.signal.aborted) throw new StoppedError();
    if (stop?.aborted === true) return undefined;
    try {
      const opened = await open();
      const tookS = Math.max(1, Math.round((performance.now() - startedMs) / 1000));
      wait.say(`${instrument} is back after ${tookS} s; ${wait.then}.`);
      return opened;
    } catch (error) {
      if (!(error instanceof InstrumentError)) throw error;
      inTheWay = error;
    }
    const nowMs = performance.now();
    if (nowMs - startedMs >= wait.seconds * 1000) {
      const isAway = inTheWay instanceof PortMissingError || inTheWay instanceof DisconnectedError;
      throw isAway ? new DisconnectedError({ instrument, port }, { cause: inTheWay, waitedSeconds: wait.seconds }) : inTheWay;
    }
    if (nowMs - saidMs >= SAY_EVERY_MS) {
      saidMs = nowMs;
      wait.say(
        `Still waiting for ${instrument} on ${port}: ${Math.round((nowMs - startedMs) / 1000)} of ${wait.seconds} s. Last: ${inTheWay.message}.`,
      );
    }
  }
}

function pause(milliseconds: number, signals: readonly (AbortSignal | undefined)[]): Promise<void> {
  return new Promise((resolve) => {
    const end = (): void => {
      clearTimeout(timer);
      for (const signal of signals) signal?.removeEventListener('abort', end);
      resolve();
    };
    const timer = setTimeout(end, milliseconds);
    for (const signal of signals) {
      if (signal?.aborted === true) end();
      else signal?.addEventListener('abort', end);
    }
  });
}
