import type { DecodeAnswer, PhaseView, Segment } from '../../shared/decode/answer.js';
import { decodeCapture } from '../../shared/decode/decode-capture.js';
import { viewCapture } from '../../shared/decode/view-capture.js';
import { lampFace } from '../../shared/lamps/face.js';
import { clock } from '../../shared/script/judge-watch.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Style } from '../output.js';
import { faceLines } from '../render/face-lines.js';
import { drawLanes, laneColumns, WEAK_BELOW, type Lane } from '../render/lanes.js';
import { padRight, spread, wrap } from '../render/columns.js';
import type { LampWindow } from './lamp-window.js';
import { times } from '../render/words.js';

/** How often a code must have shown before the technician is sent on to the next (look, terminal: "has shown 4 times"). */
const SURE_REPEATS = 4;

type DecodedCode = DecodeAnswer['codes'][number];

/** What the decoder makes of a capture so far. Times in seconds since the start of the capture. */
export interface Understanding {
  segments: Segment[];
  codes: DecodedCode[];
  phases: PhaseView[];
  lamps: { threshold: number | null; litFraction: number | null }[];
  warnings: string[];
}

export const NOTHING_YET: Understanding = { segments: [], codes: [], phases: [], lamps: [], warnings: [] };

/** Decodes what the window holds, and has it keep the ready blink that proves the lamps. */
export function understand(window: LampWindow, sheet: Sheet): Understanding {
  const { capture, fromUs, shownFromUs } = window.capture({ withProof: true });
  if (capture.timesUs.length === 0) return NOTHING_YET;
  const answer = decodeCapture(capture, sheet);
  const view = viewCapture(capture, sheet);
  const later = <T extends { fromS: number; toS: number }>(stretch: T): T => ({
    ...stretch,
    fromS: stretch.fromS + fromUs / 1e6,
    toS: stretch.toS + fromUs / 1e6,
  });
  const lamps = sheet.lamps.map(({ id }) => view.lamps.find((lamp) => lamp.id === id) ?? { threshold: null, litFraction: null });
  const inWindow = ({ toS }: { toS: number }): boolean => toS * 1e6 > shownFromUs;
  const segments = answer.segments.map(later).filter(inWindow);
  const ready = segments.findLast(({ kind }) => kind === 'ready');
  if (ready) window.keepProof(ready.fromS * 1e6, ready.toS * 1e6);
  return { segments, codes: answer.codes, phases: view.phases.map(later).filter(inWindow), lamps, warnings: answer.warnings };
}

/** Whether the code that shows now has shown often enough. */
export function sureCode({ codes, segments }: Understanding): DecodedCode | undefined {
  const last = segments.findLast((segment) => segment.kind === 'code');
  const code = codes.at(-1);
  return code !== undefined && last?.code === code.code && (code.repeats ?? SURE_REPEATS) >= SURE_REPEATS ? code : undefined;
}

export interface ViewParts {
  window: LampWindow;
  sheet: Sheet;
  understood: Understanding;
  elapsedS: number;
  seconds: number | undefined;
  byKeys: boolean;
  /** Somebody sits there: the keys are shown. */
  attended: boolean;
  /** A watch waits for something: no codes are asked for. */
  waitsFor?: string | undefined;
  /** Goes before everything else that is to be done. */
  notice?: string | undefined;
}

/** The live view as lines: lanes, phases, code, lamp face, what to do, keys. What there is no room for is left out from the face up. */
export function liveLines(parts: ViewParts, style: Style, rows: number): string[] {
  const { window, sheet, understood, seconds, elapsedS } = parts;
  const { ink, columns } = style;
  const { coding } = sheet;
  const shown = window.columns(laneColumns(columns), parts.byKeys ? elapsedS * 1_000_000 : undefined);
  const levels = window.now;
  const lanes = sheet.lamps.map((lamp, index): Lane => {
    const known = understood.lamps[index];
    const level = levels[index] ?? 0;
    const threshold = known?.threshold == null ? undefined : known.threshold / window.header.scale.max;
    return {
      label: lamp.label,
      colour: lamp.colour,
      weight: coding.kind === 'weighted-phases' ? coding.weights[lamp.id] : undefined,
      levels: shown.levels[index] ?? [],
      lit: window.samples === 0 ? undefined : level > (threshold ?? WEAK_BELOW),
      litFraction: parts.byKeys ? undefined : (known?.litFraction ?? undefined),
    };
  });
  const letters = coding.kind === 'weighted-phases' ? (coding.letters ?? { on: '', off: '' }) : { on: '', off: '' };
  const marks = window.marks.map(({ atUs, label }) => ({ atS: atUs / 1e6, label }));
  const strip = drawLanes({ lanes, fromS: shown.fromS, marks, phases: understood.phases, segments: understood.segments, letters }, style);
  const time = `${clock(elapsedS)}${seconds === undefined ? '' : ` of ${clock(seconds)}`}`;
  const lost = window.lost > 0 ? `, ${window.lost} lines lost` : '';
  const title = spread(
    ` ${ink.bold(parts.waitsFor ?? (parts.byKeys ? 'The lamps, by keys' : 'The lamps'))}${lost}`,
    ink.bold(`going ${time}`),
    columns - 1,
  );
  const foot = [
    ...(parts.byKeys ? [keyRow(window, sheet, style)] : []),
    ...wrap(parts.notice ?? whatNow(parts), columns - 3).map((line) => ` ${ink.bold(line)}`),
    ...(parts.attended ? [keyLine(parts, style)] : []),
  ];
  const room = rows - 2 - strip.length - foot.length - 1;
  return [title, ...strip, ...fitted(codeFace(parts, style), room), ...foot];
}

/** With a blank line on both sides where there is room for it. */
function fitted(lines: readonly string[], room: number): string[] {
  if (lines.length === 0 || room < lines.length) return room >= 1 ? [''] : [];
  return room >= lines.length + 2 ? ['', ...lines, ''] : [...lines];
}

/** The face of the code that shows, and how sure it is. */
function codeFace({ understood, sheet }: ViewParts, style: Style): string[] {
  const segment = understood.segments.findLast((one) => one.kind === 'code' || one.kind === 'unreadable');
  if (segment?.kind !== 'code') return [];
  const face = lampFace(segment.code, sheet);
  const sure = `${segment.repeats === undefined ? '' : `${times(segment.repeats)}, `}confidence ${segment.confidence.toFixed(4)}`;
  return face
    ? faceLines(face, style, [face.title ?? '', sure])
    : [` ${style.ink.bold(segment.code)}   ${sheet.faults.find(({ code }) => code === segment.code)?.title ?? ''}   ${sure}`];
}

function whatNow({ understood, waitsFor, window, attended }: ViewParts): string {
  if (!attended) return window.samples === 0 ? 'Waiting for the first sample.' : 'Nobody is asked; it ends by itself.';
  if (waitsFor !== undefined) return 'Hands off. It is watched until it ends.';
  if (window.samples === 0) return 'Waiting for the first sample.';
  const sure = sureCode(understood);
  if (sure)
    return `${sure.code} has shown${sure.repeats === undefined ? '' : ` ${times(sure.repeats)}`}. Bring up the next code, then press space.`;
  const last = understood.segments.at(-1);
  if (last?.kind === 'unreadable') return last.reason.charAt(0).toUpperCase() + last.reason.slice(1);
  if (last?.kind === 'ready') return 'Service mode is on. Bring up the first code.';
  return 'Let it show a few times more.';
}

function keyLine({ byKeys, sheet, waitsFor }: ViewParts, { ink }: Style): string {
  const key = (name: string, word: string): string => `${ink.inverse(` ${name} `)} ${word}`;
  const lamps = byKeys ? [key(`1…${Math.min(9, sheet.lamps.length)}`, 'lamp on or off')] : [];
  const next = waitsFor === undefined ? [key('space', 'mark next code')] : [];
  return ` ${[...lamps, ...next, key('s', 'stop'), key('q', byKeys ? 'leave' : 'leave, keep it all')].join('  ')}`;
}

/** For `--keys`: which key is which lamp, and what it shows. */
function keyRow(window: LampWindow, sheet: Sheet, { ink }: Style): string {
  const lit = window.now;
  return ` ${sheet.lamps.map((lamp, index) => padRight(`${index + 1} ${lamp.label} ${(lit[index] ?? 0) > 0 ? ink.bold('on') : 'off'}`, 12)).join('')}`;
}

/** Where nobody watches: a line now and then, so that a log says what is awaited and for how long. */
export function progressLine(
  window: LampWindow,
  understood: Understanding | undefined,
  elapsedS: number,
  seconds: number | undefined,
): string {
  const time = `  ${Math.round(elapsedS)} s${seconds === undefined ? '' : ` of ${understood ? '' : 'at most '}${Math.round(seconds)} s`}, ${window.samples} samples`;
  if (!understood) return time;
  const codes = understood.codes.map(({ code, repeats }) => `${code}${repeats === undefined ? '' : ` ${times(repeats)}`}`);
  const last = understood.segments.at(-1)?.kind ?? 'nothing yet';
  return `${time}, ${codes.length > 0 ? codes.join(', ') : last === 'ready' ? 'ready blink' : last}`;
}
