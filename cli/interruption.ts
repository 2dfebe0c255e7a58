/**
 * Ctrl-C. While something is being recorded the first one asks it to come to a safe end, and the second leaves at once.
 * While nothing is, the first one leaves.
 */
export class Interruption {
  readonly #controller = new AbortController();
  readonly #leaveNow: () => void;
  /** Of a command that the menu runs: even with nothing to hold on to, the first Ctrl-C only ends the command. */
  readonly #firstOnlyEnds: boolean;
  #holders = 0;
  #lentTo: Interruption | undefined;

  constructor(leaveNow: () => void, { firstOnlyEnds = false }: { firstOnlyEnds?: boolean } = {}) {
    this.#leaveNow = leaveNow;
    this.#firstOnlyEnds = firstOnlyEnds;
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
    if (this.#lentTo) {
      this.#lentTo.interrupt();
      return;
    }
    const first = !this.signal.aborted;
    this.#controller.abort();
    if (!first || (this.#holders === 0 && !this.#firstOnlyEnds)) this.#leaveNow();
  }

  /** The terminal went away, or somebody ends the process: whatever runs comes to its safe end, and nothing begins after it. */
  end(): void {
    this.interrupt();
    this.#controller.abort();
  }

  /** While `work` runs, Ctrl-C is that of the command it is. */
  async lend<T>(to: Interruption, work: () => Promise<T>): Promise<T> {
    this.#lentTo = to;
    try {
      return await work();
    } finally {
      this.#lentTo = undefined;
    }
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
