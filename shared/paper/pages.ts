import type { Face } from './type.js';

// What is printed, as data: the terminal writes it as a PDF, the browser as a picture of the same size. Both draw the same marks at the
// same places, and a test holds one against the other. Everything is in millimetres from the page's upper left corner; type is in points.

/** One thing on a page. Black, but for text and shapes that are `white` on black. */
export type Mark =
  | { kind: 'text'; text: string; face: Face; points: number; x: number; baseline: number; widthMm: number; white?: true }
  | { kind: 'line'; x1: number; y1: number; x2: number; y2: number; thick: number }
  /** Filled. */
  | { kind: 'rectangles'; rectangles: readonly Rectangle[] }
  /** An outline inside its place. */
  | { kind: 'frame'; rectangle: Rectangle; thick: number }
  /** An SVG path, moved to x, y and drawn `scale` millimetres to a unit. `thick`: stroked; without it filled, even and odd. */
  | { kind: 'shape'; path: string; x: number; y: number; scale: number; thick?: number; white?: true }
  | { kind: 'circle'; x: number; y: number; radius: number; thick: number; filled?: true; dash?: { on: number; off: number } }
  /** One word in outline across whatever it stands on, turned about its middle x, y; its baseline is `drop` below that. */
  | {
      kind: 'across';
      text: string;
      face: Face;
      points: number;
      x: number;
      y: number;
      drop: number;
      widthMm: number;
      degrees: number;
      thick: number;
    };

export interface Rectangle {
  x: number;
  y: number;
  width: number;
  height: number;
}

export interface PaperPage {
  widthMm: number;
  heightMm: number;
  marks: readonly Mark[];
}

/** A print job: pages of one size. */
export interface Paper {
  title: string;
  pages: readonly PaperPage[];
}

/**
 * The same mark, further to the right and further down by so many millimetres.
 *
 * @example movedMark({kind: 'line', x1: 0, y1: 0, x2: 5, y2: 0, thick: 0.3}, 10, 20) // x1: 10, y1: 20, x2: 15, y2: 20
 */
export function movedMark(mark: Mark, right: number, down: number): Mark {
  switch (mark.kind) {
    case 'text':
      return { ...mark, x: mark.x + right, baseline: mark.baseline + down };
    case 'line':
      return { ...mark, x1: mark.x1 + right, x2: mark.x2 + right, y1: mark.y1 + down, y2: mark.y2 + down };
    case 'rectangles':
      return { ...mark, rectangles: mark.rectangles.map((rectangle) => movedRectangle(rectangle, right, down)) };
    case 'frame':
      return { ...mark, rectangle: movedRectangle(mark.rectangle, right, down) };
    case 'shape':
    case 'circle':
    case 'across':
      return { ...mark, x: mark.x + right, y: mark.y + down };
  }
}

const movedRectangle = (rectangle: Rectangle, right: number, down: number): Rectangle => ({
  ...rectangle,
  x: rectangle.x + right,
  y: rectangle.y + down,
});
