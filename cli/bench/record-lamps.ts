import type { CaptureHeader } from '../../shared/lamps/capture.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { CaptureFile } from '../journal/capture-file.js';
import { liveOf } from '../live/live-of.js';
import type { LampSource } from './lamp-source.js';
import { LampWindow } from './lamp-window.js';

export type RecordingEnd =
  /** As long as it was to be, or what was waited for has come. */
  | 'done'
  /** `s`: the technician has seen enough. */
  | 'stopped'
  /** `q`: the technician leaves; what came is kept. */
  | 'left'
  /** Ctrl-C. */
  | 'interrupted';

/** What watches a recording: draws it, and says when it is over. */
export interface Watcher {
  /** After each sample or gap. True: it is over. */
  seen(window: LampWindow): boolean;
  marked(window: LampWindow): void;
  /** Something that the technician must know while it goes on: an unplugged probe is waited for. */
  notice?(line: string): void;
  /** Gives the screen back. */
  close(): void;
}

export interface RecordingParts {
  context: Context;
  captureId: string;
  unit: number;
  sheet: Sheet;
  source: LampSource;
  /** How long; until something ends it, where absent. */
  seconds: number | undefined;
  /** How much of it is kept in memory to be looked at; two minutes unless told. */
  windowSeconds?: number | undefined;
  watcher: (controls: Controls) => Promise<Watcher> | Watcher;
}

/** What keys do to a recording. */
export interface Controls {
  mark(): void;
  stop(how: 'stopped' | 'left'): void;
  takeKey(key: string): boolean;
  elapsedS(): number;
  seconds: number | undefined;
}

/** How often a recording whose source is silent looks at the clock. */
const TICK_MS = 100;

/**
 * Records lamps into a file, line by line as they come, until the time is over, a watcher or a key says so, or Ctrl-C.
 * An instrument that fails leaves the file as a cut capture and throws.
 */
export async function recordLamps(parts: RecordingParts): Promise<{ file: CaptureFile; ended: RecordingEnd }> {
  const { context, source, sheet, seconds } = parts;
  const header: CaptureHeader = {
    format: 'refettle.lamps',
    version: 1,
    capturedAt: context.now().toISOString(),
    lamps: sheet.lamps.map((lamp) => lamp.id),
    unit: parts.unit,
    family: sheet.family,
    sheetEdition: sheet.edition,
    ...source.header,
  };
  const file = new CaptureFile(context.home, parts.captureId, header);
  const live = liveOf(context).captureBegins({ captureId: parts.captureId, header, sheet, seconds });
  const window = new LampWindow(header, parts.windowSeconds);
  const stop = new AbortController();
  const limitUs = seconds === undefined ? Infinity : Math.round(seconds * 1_000_000);
  let ended: RecordingEnd = 'done';
  /** It is as long as it was to be. */
  let full = false;
  const end = (how: RecordingEnd): void => {
    if (stop.signal.aborted) return;
    ended = how;
    stop.abort();
  };
  const timeUs = (): number => source.elapsedUs() ?? window.lastUs;

  const onInterrupt = (): void => end('interrupted');
  context.interruption.signal.addEventListener('abort', onInterrupt);
  if (context.interruption.interrupted) end('interrupted');
  const watcher = await parts.watcher({
    mark: () => {
      const atUs = timeUs();
      file.mark(atUs, 'next');
      window.mark(atUs, 'next');
      live.marked(atUs);
      watcher.marked(window);
    },
    stop: end,
    takeKey: (key) => source.takeKey(key),
    elapsedS: () => timeUs() / 1_000_000,
    seconds,
  });
  const clock = setInterval(() => {
    if ((source.elapsedUs() ?? 0) >= limitUs) end('done');
  }, TICK_MS);
  const marks = [...source.simulatedMarks];
  try {
    for await (const event of source.read(stop.signal, (line) => (watcher.notice ? watcher.notice(line) : context.stderr.say(line)))) {
      if (event.kind === 'sample' && event.tUs > limitUs) {
        full = true;
        break;
      }
      while (marks[0] !== undefined && event.kind === 'sample' && event.tUs >= marks[0]) {
        const atUs = marks.shift() ?? 0;
        file.mark(atUs, 'next');
        window.mark(atUs, 'next');
        live.marked(atUs);
        watcher.marked(window);
      }
      if (event.kind === 'gap') file.gap(event.lost, event.atUs);
      else file.sample(event.tUs, event.levels);
      window.push(event);
      live.seen(event);
      if (watcher.seen(window)) end('done');
    }
    file.end(full ? limitUs : Math.min(limitUs, Math.max(timeUs(), window.lastUs)));
    live.ended(ended);
    return { file, ended };
  } catch (error) {
    file.keep();
    live.ended('failed');
    throw error;
  } finally {
    clearInterval(clock);
    context.interruption.signal.removeEventListener('abort', onInterrupt);
    watcher.close();
  }
}
