import bwipjs from 'bwip-js/node';
import { mm, type TagPen } from './tag-pen.js';

/** One dot of a 203 dpi printer, in millimetres. */
const DOT_MM = 25.4 / 203;
/** A module is a whole number of dots, 0.5 mm at least; a larger one where there is room (look/tokens, Print). */
const FEWEST_DOTS = 4;
const MOST_DOTS = 5;
const MOST_MM = 35;
/** ISO/IEC 18004: a quiet zone of four modules. */
const QUIET_MODULES = 4;

/** The modules of a QR code of error level M: true is dark. */
export function qrModules(text: string): boolean[][] {
  const [drawn] = bwipjs.raw('qrcode', text, 'eclevel=M');
  if (!drawn || !('pixs' in drawn)) throw new Error('the QR code could not be made');
  const { pixs, pixx } = drawn as { pixs: number[]; pixx: number };
  return Array.from({ length: pixx }, (_, row) => Array.from({ length: pixx }, (_column, column) => pixs[row * pixx + column] === 1));
}

/** How many printer dots wide a module is where a code has so many modules a side. */
export const qrDots = (count: number): number => ((count + 2 * QUIET_MODULES) * MOST_DOTS * DOT_MM <= MOST_MM ? MOST_DOTS : FEWEST_DOTS);

/** Draws a QR code at the right as squares, and says where its quiet zone ends. */
export function drawQr(pen: TagPen, text: string, place: { right: number; top: number }): { left: number; bottom: number } {
  const modules = qrModules(text);
  const count = modules.length;
  const module = qrDots(count) * DOT_MM;
  const quiet = QUIET_MODULES * module;
  // To the right of the text edge there is nothing but the outline, further away than the quiet zone is wide.
  const left = place.right - count * module;
  const top = place.top + quiet;
  for (const [row, line] of modules.entries()) {
    for (let column = 0; column < count; column += 1) {
      if (!line[column]) continue;
      let end = column;
      while (line[end + 1]) end += 1;
      pen.doc.rect(mm(left + column * module), mm(top + row * module), mm((end - column + 1) * module), mm(module));
      column = end;
    }
  }
  pen.doc.fill('black');
  return { left: left - quiet, bottom: top + count * module + quiet };
}
