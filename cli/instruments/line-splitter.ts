/** The longest line an instrument may send: an identification has 72 characters at most, a sample of 64 sensors some 400. */
export const LONGEST_LINE = 1024;

const EDGE_NULS = /^\0+|\0+$/g;

/**
 * Cuts what a port delivers into lines, whatever the chunks. Holds one unfinished line at most, and never more than LONGEST_LINE.
 *
 * NULs at the edges of a line (a break on the cable, a plug going in) are dropped and counted. One inside a line stays: it
 * stands where a character was, and without it `1?2.5` would read as a sound `12.5`.
 */
export class LineSplitter {
  /** Bytes that were no part of a line: edge NULs and over-long garbage. */
  droppedBytes = 0;
  /** Lines given up because they were too long. */
  droppedLines = 0;
  #pending = '';
  #skipping = false;

  /** What stands behind the last line end; nothing of a line that was given up. */
  get unfinished(): string {
    return this.#pending;
  }

  push(chunk: Uint8Array): string[] {
    const pieces = (this.#pending + Buffer.from(chunk.buffer, chunk.byteOffset, chunk.byteLength).toString('latin1')).split('\n');
    this.#pending = pieces.pop() ?? '';
    const lines = pieces.map((piece) => this.#finish(piece)).filter((line) => line !== '');
    if (this.#skipping || this.#pending.length > LONGEST_LINE) {
      this.droppedBytes += this.#pending.length;
      this.#pending = '';
      this.#skipping = true;
    }
    return lines;
  }

  /** An empty text where there is nothing to hand on. */
  #finish(piece: string): string {
    if (this.#skipping || piece.length > LONGEST_LINE) {
      this.#skipping = false;
      this.droppedBytes += piece.length;
      this.droppedLines += 1;
      return '';
    }
    const line = piece.replace(/\r$/, '');
    const bare = line.replace(EDGE_NULS, '');
    this.droppedBytes += line.length - bare.length;
    const text = bare.replace(/\r$/, '');
    return text.trim() === '' ? '' : text;
  }
}
