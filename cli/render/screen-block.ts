import type { Output } from '../output.js';
import { cut } from './columns.js';

/** Lines at the bottom of a terminal that are drawn again in place. Only for terminals. */
export class ScreenBlock {
  readonly #output: Output;
  #drawn = 0;
  #width = 0;

  constructor(output: Output) {
    this.#output = output;
  }

  /** Draws the lines over the ones before. No line may wrap, and they never fill the screen, or the place would be lost. */
  draw(lines: readonly string[]): void {
    const { columns, rows } = this.#output;
    const fitting = lines.slice(0, Math.max(1, rows - 1)).map((line) => cut(line, columns - 1));
    // A terminal that has changed its width has wrapped what stood there: nobody knows any more where it begins.
    const resized = this.#drawn > 0 && this.#width !== columns;
    const back = resized ? '\u001b[2J\u001b[H' : this.#drawn > 0 ? `\u001b[${this.#drawn}A\r\u001b[J` : '';
    this.#width = columns;
    this.#output.write(`${back}${fitting.join('\n')}\n`);
    this.#drawn = fitting.length;
  }

  /** Leaves what is drawn where it is; the next drawing begins below it. */
  leave(): void {
    this.#drawn = 0;
  }
}
