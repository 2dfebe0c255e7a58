/**
 * npm passes Ctrl-C on to its script, which the terminal has told already: one press arrives twice, within milliseconds. No hand presses
 * twice as fast as this.
 */
const samePressMs = 400;

const exitCodes = { stopped: 0, leftAtOnce: 130 };

/** What to close, the last opened first. */
export class Shutdown {
  readonly #closers: (() => Promise<void> | void)[] = [];
  #stoppedAt: number | undefined;

  constructor(private readonly write: (text: string) => void) {}

  /** What was opened, and how it is closed. */
  add(close: () => Promise<void> | void): void {
    this.#closers.push(close);
  }

  get isUnderWay(): boolean {
    return this.#stoppedAt !== undefined;
  }

  /** The first Ctrl-C closes everything in order, the second one leaves at once: PostgreSQL then stops by itself. */
  listenToSignals(): void {
    for (const signal of ['SIGINT', 'SIGTERM'] as const) {
      process.on(signal, () => {
        if (this.#stoppedAt === undefined) {
          this.write('\nStopping. Everything that was sent is stored.\n');
          void this.stop(exitCodes.stopped);
        } else if (performance.now() - this.#stoppedAt > samePressMs) {
          process.exit(exitCodes.leftAtOnce);
        }
      });
    }
  }

  async stop(exitCode: number): Promise<void> {
    if (this.#stoppedAt !== undefined) return;
    this.#stoppedAt = performance.now();
    for (const close of this.#closers.reverse()) {
      try {
        await close();
      } catch (error) {
        // The others must be closed all the same.
        this.write(`While stopping: ${String(error)}\n`);
      }
    }
    process.exit(exitCode);
  }
}
