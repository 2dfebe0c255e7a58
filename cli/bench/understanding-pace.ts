/** The decoder looks again every second, and never takes more than a tenth of the time. */
const UNDERSTAND_EVERY_MS = 1000;
const REST_FACTOR = 10;

/** When a capture that goes on is worth decoding again. */
export class UnderstandingPace {
  #againMs = 0;

  get isDue(): boolean {
    return performance.now() >= this.#againMs;
  }

  /** At the next look, whatever was before. */
  soon(): void {
    this.#againMs = 0;
  }

  /** Does it, and rests according to how long that took. */
  take<T>(work: () => T): T {
    const startedMs = performance.now();
    try {
      return work();
    } finally {
      const endedMs = performance.now();
      this.#againMs = endedMs + Math.max(UNDERSTAND_EVERY_MS, REST_FACTOR * (endedMs - startedMs));
    }
  }
}
