import type { Mark, Rectangle } from './pages.js';
import { POINTS_PER_MM, readableText, runsOf, runWidthMm, widthMm, type Face, type Run } from './type.js';

/** The smallest type on paper: thermal printers have 8 dots a mm (look/tokens, Print). */
export const SMALLEST_POINTS = 7;
const POINTS_STEP = 0.25;
const ELLIPSIS = '…';
/** Half the height of the reading face's capitals, as a part of the type size. */
const HALF_CAPITAL = 0.334;

interface TextPlace {
  x: number;
  baseline: number;
  face: Face;
  points: number;
  align?: 'left' | 'right' | 'centre';
  white?: true;
}

interface ParagraphPlace {
  x: number;
  /** Of the first line. */
  baseline: number;
  points: number;
  width: number;
  /** From baseline to baseline, at `points`. */
  lineHeight: number;
  /** What has no room in so many lines is set smaller, and at the smallest type cut with an ellipsis. */
  mostLines?: number;
  /** Smaller than this it does not get; the smallest type unless told. */
  leastPoints?: number;
}

/** Draws marks onto one page, in millimetres. Holds nothing but the marks. */
export class Pen {
  readonly marks: Mark[] = [];

  /** One line of text. Gives its width. */
  text(text: string, { x, baseline, face, points, align = 'left', white }: TextPlace): number {
    const runs = runsOf(text, face);
    const width = runs.reduce((sum, run) => sum + runWidthMm(run, points), 0);
    let at = align === 'left' ? x : align === 'right' ? x - width : x - width / 2;
    for (const run of runs) {
      const wide = runWidthMm(run, points);
      // Blanks at the ends of a mark are nothing to draw, and SVG drops them: they only move what follows.
      const text = run.text.trim();
      const before = runWidthMm({ ...run, text: run.text.slice(0, run.text.length - run.text.trimStart().length) }, points);
      const mark = {
        kind: 'text',
        text,
        face: run.face,
        points,
        x: at + before,
        baseline,
        widthMm: runWidthMm({ ...run, text }, points),
      } as const;
      if (text !== '') this.marks.push({ ...mark, ...(white ? { white } : {}) });
      at += wide;
    }
    return width;
  }

  /** As large as asked; smaller where it has no room, never below `leastPoints`; then cut with an ellipsis. Gives its width. */
  fit(text: string, place: TextPlace & { width: number; leastPoints?: number }): number {
    const { face, width, leastPoints = SMALLEST_POINTS } = place;
    let { points } = place;
    while (points > leastPoints && widthMm(text, face, points) > width) points = Math.max(leastPoints, points - POINTS_STEP);
    return this.text(cutToWidth(text, face, points, width), { ...place, points });
  }

  /** Words over as many lines as they need. Gives the baseline below the last line, and how many lines there are. */
  paragraph(runs: readonly Run[], place: ParagraphPlace): { below: number; lines: number } {
    const { lines, lineHeight, points } = layLines(runs, place);
    lines.forEach((line, index) => {
      let at = place.x;
      for (const { text, face } of line) at += this.text(text, { x: at, baseline: place.baseline + index * lineHeight, face, points });
    });
    return { below: place.baseline + lines.length * lineHeight, lines: lines.length };
  }

  line(x1: number, y1: number, x2: number, y2: number, thick: number): void {
    this.marks.push({ kind: 'line', x1, y1, x2, y2, thick });
  }

  fill(...rectangles: readonly Rectangle[]): void {
    this.marks.push({ kind: 'rectangles', rectangles });
  }

  /** A rectangle's outline; the line lies inside it. */
  frame(rectangle: Rectangle, thick: number): void {
    this.marks.push({ kind: 'frame', rectangle, thick });
  }

  shape(path: string, place: { x?: number; y?: number; scale?: number; thick?: number; white?: true }): void {
    this.marks.push({ kind: 'shape', path, x: 0, y: 0, scale: 1, ...place });
  }

  circle(x: number, y: number, radius: number, how: { thick: number; filled?: true; dash?: { on: number; off: number } }): void {
    this.marks.push({ kind: 'circle', x, y, radius, ...how });
  }

  /** A word in outline, turned about the point x, y in its middle. */
  across(text: string, how: { x: number; y: number; face: Face; points: number; degrees: number; thick: number }): void {
    const drop = (how.points * HALF_CAPITAL) / POINTS_PER_MM;
    this.marks.push({ kind: 'across', text, widthMm: widthMm(text, how.face, how.points), drop, ...how });
  }
}

/**
 * A text that is at most so wide: whole, or its beginning and an ellipsis.
 *
 * @example cutToWidth('Protective conductor', 'read', 8, 20) // 'Protective c…'
 */
export function cutToWidth(text: string, face: Face, points: number, width: number): string {
  if (widthMm(text, face, points) <= width) return text;
  // Cut what is printed: a letter that is written by its code point has more signs than one.
  let kept = [...readableText(text)];
  while (kept.length > 0 && widthMm(`${kept.join('')}${ELLIPSIS}`, face, points) > width) kept = kept.slice(0, -1);
  return `${kept.join('').trimEnd()}${ELLIPSIS}`;
}

/** How a paragraph falls into lines: each a list of runs, with the size and line height it took. */
export function layLines(
  runs: readonly Run[],
  { points: asked, width, lineHeight, mostLines = Infinity, leastPoints = SMALLEST_POINTS }: Omit<ParagraphPlace, 'x' | 'baseline'>,
): { lines: Run[][]; points: number; lineHeight: number } {
  let points = asked;
  let lines = breakLines(runs, points, width);
  while (lines.length > mostLines && points > leastPoints) {
    points = Math.max(leastPoints, points - POINTS_STEP);
    lines = breakLines(runs, points, width);
  }
  if (lines.length > mostLines) lines = cutLines(lines, mostLines, points, width);
  return { lines, points, lineHeight: (lineHeight * points) / asked };
}

function breakLines(runs: readonly Run[], points: number, width: number): Run[][] {
  const lines: Run[][] = [[]];
  let at = 0;
  const put = (text: string, face: Face, wide: number): void => {
    const line = lines.at(-1) ?? [];
    const last = line.at(-1);
    if (last?.face === face) last.text += text;
    else line.push({ text, face });
    at += wide;
  };
  const breakLine = (): void => {
    lines.push([]);
    at = 0;
  };
  for (const { face, text } of runs) {
    for (const word of readableText(text).split(/(?<= )/)) {
      const wide = widthMm(word.trimEnd(), face, points);
      if (at > 0 && at + wide > width) breakLine();
      if (wide <= width) put(word, face, widthMm(word, face, points));
      else {
        // A word that is wider than the paper is broken where it must be.
        for (const character of word) {
          const one = widthMm(character, face, points);
          if (at > 0 && at + one > width) breakLine();
          put(character, face, one);
        }
      }
    }
  }
  return lines.filter((line) => line.length > 0);
}

/** The first lines, the last of them ending with an ellipsis. */
function cutLines(lines: readonly Run[][], most: number, points: number, width: number): Run[][] {
  const kept = lines.slice(0, most).map((line) => [...line]);
  const last = kept.at(-1);
  const end = last?.pop();
  if (last && end) {
    const before = last.reduce((sum, { text, face }) => sum + widthMm(text, face, points), 0);
    const room = width - before - widthMm(ELLIPSIS, end.face, points);
    let text = [...end.text.trimEnd()];
    while (text.length > 0 && widthMm(text.join(''), end.face, points) > room) text = text.slice(0, -1);
    last.push({ text: `${text.join('').trimEnd()}${ELLIPSIS}`, face: end.face });
  }
  return kept;
}
