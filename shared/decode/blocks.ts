import type { Band } from '../sheet/schema.js';
import type { Cell, Hole } from './cells.js';
import { isDark, type Piece } from './phases.js';
import type { ReadyStretch } from './ready-blink.js';

/** A time between two ends (ready blink, darkness, a long hole, the file's ends) in which codes may stand. */
export interface Block {
  pieces: Piece[];
  /** The darkness after it, however short: a second digit of 0 may hide in it. */
  darkness?: Piece;
}

export interface Blocks {
  blocks: Block[];
  dark: Piece[];
  holes: Hole[];
}

/** Takes the ready stretches out of the cells: what is left, one list for each time between them. */
export function outsideReady(cells: readonly Cell[], ready: readonly ReadyStretch[]): Cell[][] {
  const regions: Cell[][] = [[]];
  let next = 0;
  for (const cell of cells) {
    let rest: Cell | undefined = { ...cell };
    while (rest !== undefined) {
      while (next < ready.length && (ready[next] as ReadyStretch).toS <= rest.fromS) {
        next += 1;
        regions.push([]);
      }
      const stretch = ready[next];
      if (stretch === undefined || stretch.fromS >= rest.toS) {
        regions.at(-1)?.push(rest);
        break;
      }
      if (stretch.fromS > rest.fromS) regions.at(-1)?.push({ ...rest, toS: stretch.fromS, openEnd: false });
      rest = stretch.toS < rest.toS ? { ...rest, fromS: stretch.toS, openStart: false } : undefined;
    }
  }
  return regions;
}

/**
 * Cuts pieces into blocks at darkness longer than the longest phase and at holes of a cycle or more. Darkness at a block's edges is no phase:
 * what comes after it is kept beside the block.
 */
export function cutBlocks(pieces: readonly Piece[], band: Band, cycleS: number): Blocks {
  const result: Blocks = { blocks: [], dark: [], holes: [] };
  let current: Piece[] = [];
  const finish = (ending?: Piece): void => {
    const first = current.findIndex((piece) => !isDark(piece) && piece.kind !== 'hole');
    const last = current.findLastIndex((piece) => !isDark(piece) && piece.kind !== 'hole');
    if (first >= 0) {
      const darkness = last + 1 < current.length ? current[last + 1] : ending;
      result.blocks.push({
        pieces: current.slice(first, last + 1),
        ...(darkness !== undefined && isDark(darkness) ? { darkness } : {}),
      });
    }
    current = [];
  };
  for (const piece of pieces) {
    const lengthS = piece.toS - piece.fromS;
    if (isDark(piece) && lengthS > band[1]) {
      finish(piece);
      result.dark.push(piece);
    } else if (piece.kind === 'hole' && lengthS >= cycleS) {
      finish();
      result.holes.push({ fromS: piece.fromS, toS: piece.toS });
    } else current.push(piece);
  }
  finish();
  return result;
}
