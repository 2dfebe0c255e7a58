/**
 * Ctrl-C. While something is being recorded the first one asks it to come to a safe end, and the second leaves at once.
 * While nothing is, the first one leaves.
 */
export class Interruption {
  readonly #controller = new AbortController();
  readonly #leaveNow: () => void;
  #holders = 0;

  constructor(leaveNow: () => void) {
    this.#leaveNow = leaveNow;
  }

  /** Aborts at the first Ctrl-C. */
  get signal(): AbortSignal {
    return this.#controller.signal;
  }

  get interrupted(): boolean {
    return this.signal.aborted;
  }

  /** Ctrl-C was pressed, or the terminal went away. */
  interrupt(): void {
    const first = !this.signal.aborted;
    this.#controller.abort();
    if (!first || this.#holders === 0) this.#leaveNow();
  }

  /** While `work` runs, the first Ctrl-C is the work's own to deal with. */
  async hold<T>(work: () => Promise<T>): Promise<T> {
    this.#holders += 1;
    try {
      return await work();
    } finally {
      this.#holders -= 1;
    }
  }
}
