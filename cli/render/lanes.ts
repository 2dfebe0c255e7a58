import type { PhaseView, Segment } from '../../shared/decode/answer.js';
import type { Lamp } from '../../shared/sheet/schema.js';
import type { Style } from '../output.js';
import { padLeft, padRight, shown } from './columns.js';
import { times } from './words.js';

/** Four columns a second (look/tokens, Terminal). */
export const COLUMNS_PER_SECOND = 4;
/** Left of the lanes: a blank, the label, the weight, the edge. Right: the edge, the lamp now, its lit level. */
const LABEL_COLUMNS = 7;
const LEFT = LABEL_COLUMNS + 3;
const RIGHT = 9;
const EIGHTHS = ['▁', '▂', '▃', '▄', '▅', '▆', '▇', '█'];
/** Under this share of full scale a lit lamp is called weak (look/tokens, Strip chart). */
export const WEAK_BELOW = 0.5;

export interface Lane {
  label: string;
  weight: number | undefined;
  colour: Lamp['colour'];
  /** The light level of each column, 0 to 1 of full scale. */
  levels: readonly number[];
  /** Undefined while it can't be told. */
  lit: boolean | undefined;
  /** The level while lit, 0 to 1 of full scale. */
  litFraction: number | undefined;
}

export interface LanesModel {
  lanes: readonly Lane[];
  /** When the first column begins, in seconds since the start of the capture. */
  fromS: number;
  marks: readonly { atS: number; label: string }[];
  phases: readonly PhaseView[];
  segments: readonly Segment[];
  letters: { on: string; off: string };
}

/** How many columns of lanes fit. */
export const laneColumns = (columns: number): number => Math.max(12, columns - LEFT - RIGHT - 1);

/** A lit lamp in its own colour: amber is yellow and blue is cyan, for plain blue is too dark on many terminals. White is the terminal's own. */
export function lampSign(lit: boolean | undefined, colour: Lamp['colour'], { ink }: Pick<Style, 'ink'>): string {
  if (lit === undefined) return ' ';
  if (!lit) return ink.dim('○');
  const dress = { amber: ink.yellow, blue: ink.cyan, green: ink.green, red: ink.red, white: (text: string) => text }[colour];
  return dress('●');
}

const eighth = (level: number): string => EIGHTHS[Math.max(0, Math.min(7, Math.round(level * 8) - 1))] ?? '▁';

/** The lanes of a capture: a lane a lamp, time to the right, phases and codes written under it. */
export function drawLanes(model: LanesModel, style: Style): string[] {
  const width = laneColumns(style.columns);
  const columnOf = (atS: number): number => Math.round((atS - model.fromS) * COLUMNS_PER_SECOND);
  const framed = (left: string, text: string, right: string): string =>
    `${padRight(left, LEFT)}│${padRight(text, width)}│ ${right}`.trimEnd();
  const lanes = model.lanes.map((lane) => {
    const label = `${padRight(lane.label.toLowerCase().slice(0, LABEL_COLUMNS), LABEL_COLUMNS)}${padLeft(lane.weight === undefined ? '' : String(lane.weight), 2)}`;
    const percent = lane.litFraction === undefined ? '' : `${Math.round(lane.litFraction * 100)} %`;
    const weak = lane.litFraction !== undefined && lane.litFraction < WEAK_BELOW ? style.ink.bold(percent) : percent;
    return `${padRight(` ${label}`, LEFT)}│${padRight(lane.levels.slice(0, width).map(eighth).join(''), width)}│ ${lampSign(lane.lit, lane.colour, style)} ${weak}`.trimEnd();
  });
  const bare = (name: string, text: string): string => `${padRight(` ${name}`, LEFT)} ${text}`.trimEnd();
  return [
    framed(
      '',
      place(
        model.marks.map((mark) => ({ at: columnOf(mark.atS), text: `↓ ${mark.label}` })),
        width,
      ),
      'lit',
    ),
    ...lanes,
    framed('', place(fiveSeconds(model.fromS, width), width), ''),
    bare('phases', place(phaseTexts(model, columnOf), width)),
    bare('code', codeLine(model.segments, columnOf, width)),
  ].map((line) => shown(line, style));
}

/** Texts put at their columns; one that would run into the one before it is left out. */
function place(texts: readonly { at: number; text: string }[], width: number): string {
  let line = '';
  for (const { at, text } of texts) {
    if (at < 0 || at + text.length > width || (line !== '' && at <= line.length)) continue;
    line = line.padEnd(at) + text;
  }
  return line;
}

function fiveSeconds(fromS: number, width: number): { at: number; text: string }[] {
  const texts: { at: number; text: string }[] = [];
  for (let second = Math.ceil(fromS / 5) * 5; ; second += 5) {
    const at = Math.round((second - fromS) * COLUMNS_PER_SECOND) - 1;
    if (at >= width) return texts;
    if (second > 0) texts.push({ at, text: `${second} s` });
  }
}

/** A phase is written with its letter and digit where it begins; stretches without phases by their name. */
function phaseTexts({ phases, segments, letters, fromS }: LanesModel, columnOf: (atS: number) => number): { at: number; text: string }[] {
  const texts = phases
    .filter((phase) => phase.digit !== null)
    .map((phase) => ({ at: columnOf(phase.fromS), text: `${phase.selectorLit ? letters.on : letters.off}${phase.digit ?? ''}` }));
  const names = { ready: 'ready blink', dark: 'dark', unreadable: 'unreadable', code: '' } as const;
  for (const segment of segments) {
    const text = names[segment.kind];
    if (text !== '' && segment.toS > fromS) texts.push({ at: Math.max(0, columnOf(segment.fromS)), text });
  }
  return texts.sort((a, b) => a.at - b.at);
}

/** Under the phases a bracket with the code and how often it was seen. */
function codeLine(segments: readonly Segment[], columnOf: (atS: number) => number, width: number): string {
  let line = '';
  for (const segment of segments) {
    const from = Math.max(0, columnOf(segment.fromS), line === '' ? 0 : line.length + 1);
    const to = Math.min(width, columnOf(segment.toS));
    if (to - from < 4) continue;
    if (segment.kind === 'ready') line = line.padEnd(from) + 'service mode on'.slice(0, to - from);
    if (segment.kind === 'code')
      line = line.padEnd(from) + bracket(`${segment.code}${segment.repeats === undefined ? '' : `, ${times(segment.repeats)}`}`, to - from);
  }
  return line;
}

function bracket(text: string, width: number): string {
  const room = width - 1 - text.length - 2;
  if (room < 2) return `└${'─'.repeat(Math.max(0, width - 1))}`;
  const left = Math.floor(room / 2);
  return `└${'─'.repeat(left)} ${text} ${'─'.repeat(room - left)}`;
}
