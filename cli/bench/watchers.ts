import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { readKeys } from '../keyboard.js';
import { ScreenBlock } from '../render/screen-block.js';
import { liveOf } from '../live/live-of.js';
import type { LampWindow } from './lamp-window.js';
import { liveLines, NOTHING_YET, progressLine, understand, type Understanding } from './live-view.js';
import type { Controls, Watcher } from './record-lamps.js';
import { UnderstandingPace } from './understanding-pace.js';

/** The lanes are drawn 4 times a second at most (look/tokens, Terminal). */
const DRAW_EVERY_MS = 250;
/** A notice stands until the next one, which comes every ten seconds while something is waited for. */
const NOTICE_STANDS_MS = 12_000;
/** Where nobody watches: one line in so many seconds of the capture, fewer where something is only waited for. */
const PROGRESS_EVERY_S = 10;
const WAITING_EVERY_S = 30;

export interface WatchingParts {
  context: Context;
  sheet: Sheet;
  /** Somebody sits there: keys are read. */
  attended: boolean;
  byKeys?: boolean;
  /** Something is waited for: asked now and then whether it has come. */
  over?: (window: LampWindow) => boolean;
  waitsFor?: string | undefined;
}

/** The live view on a terminal, a line now and then elsewhere. */
export function watching(parts: WatchingParts): (controls: Controls) => Promise<Watcher> {
  return (controls) => (parts.context.stderr.isTerminal ? liveWatcher(parts, controls) : Promise.resolve(quietWatcher(parts, controls)));
}

async function liveWatcher(parts: WatchingParts, controls: Controls): Promise<Watcher> {
  const { context, sheet, byKeys = false, waitsFor } = parts;
  const { stderr } = context;
  const block = new ScreenBlock(stderr);
  const style = await stderr.style();
  let window: LampWindow | undefined;
  let understood: Understanding = NOTHING_YET;
  const pace = new UnderstandingPace();
  let closed = false;
  let notice: { line: string; untilMs: number } | undefined;

  const draw = (): void => {
    if (!window || closed) return;
    const seen = window;
    if (pace.isDue) {
      understood = pace.take(() => understand(seen, sheet));
      liveOf(context).understood(understood, sheet, seen.header.scale.max);
    }
    block.draw(
      liveLines(
        {
          window,
          sheet,
          understood,
          elapsedS: controls.elapsedS(),
          seconds: controls.seconds,
          byKeys,
          waitsFor,
          notice: notice !== undefined && performance.now() < notice.untilMs ? notice.line : undefined,
          attended: parts.attended && context.interactive,
        },
        style,
        stderr.rows,
      ),
    );
  };
  const timer = setInterval(draw, DRAW_EVERY_MS);
  const keyboard =
    parts.attended && context.interactive
      ? await readKeys(context.stdin, onKeyOf(controls, waitsFor !== undefined), () => context.interruption.interrupt())
      : undefined;
  const over = lookNowAndThen(parts.over);
  return {
    seen(seenWindow) {
      window = seenWindow;
      return over(seenWindow);
    },
    marked(markedWindow) {
      window = markedWindow;
      // The next code was brought up: what has shown so far is no longer the one to judge.
      pace.soon();
    },
    notice(line) {
      notice = { line, untilMs: performance.now() + NOTICE_STANDS_MS };
      // Before the first sample nothing is drawn yet.
      if (!window) stderr.say(line);
      draw();
    },
    close() {
      clearInterval(timer);
      keyboard?.close();
      // The last picture shows all that came.
      pace.soon();
      draw();
      closed = true;
      block.leave();
    },
  };
}

function onKeyOf(controls: Controls, waits: boolean): (key: string) => void {
  return (key) => {
    if (controls.takeKey(key)) return;
    if (key === ' ' && !waits) controls.mark();
    else if (key.toLowerCase() === 's') controls.stop('stopped');
    else if (key.toLowerCase() === 'q') controls.stop('left');
  };
}

function quietWatcher(parts: WatchingParts, controls: Controls): Watcher {
  const { context, sheet } = parts;
  const live = liveOf(context);
  const over = lookNowAndThen(parts.over);
  const everyS = parts.over ? WAITING_EVERY_S : PROGRESS_EVERY_S;
  let nextS = everyS;
  if (parts.waitsFor !== undefined) context.stderr.write(`  ${parts.waitsFor}\n`);
  return {
    seen(window) {
      const elapsedS = window.lastUs / 1_000_000;
      if (!parts.over) live.understandNowAndThen(() => understand(window, sheet), sheet, window.header.scale.max);
      if (elapsedS >= nextS) {
        nextS += everyS;
        context.stderr.write(`${progressLine(window, parts.over ? undefined : understand(window, sheet), elapsedS, controls.seconds)}\n`);
      }
      return over(window);
    },
    marked: () => context.stderr.say('  next code'),
    notice: (line) => context.stderr.say(`  ${line}`),
    close: () => undefined,
  };
}

/** Looking costs more the longer a capture is: once a second of it at first, later every twentieth of it. */
function lookNowAndThen(over: WatchingParts['over']): (window: LampWindow) => boolean {
  let nextS = 1;
  return (window) => {
    const elapsedS = window.lastUs / 1_000_000;
    if (!over || elapsedS < nextS) return false;
    nextS = elapsedS + Math.max(1, elapsedS / 20);
    return over(window);
  };
}
