import type { ClockJump } from '../../shared/script/run-log.js';

/** A clock that is set by less than this is only being kept right (common practice of network time, no published source). */
const JUMP_SECONDS = 2;

/**
 * The time of a bench log: the clock on the wall, except that it never runs backwards. Where the wall clock is set back, time goes on
 * from where it was, at the pace of the machine's own counter; where it is set forward, the log goes along. Both are told.
 */
export class SteadyClock {
  readonly #wall: () => Date;
  readonly #counterMs: () => number;
  readonly #jumped: (jump: Omit<ClockJump, 'steps'>) => void;
  #wallMs: number;
  #countMs: number;
  #lastMs: number;

  constructor(
    wall: () => Date,
    counterMs: () => number,
    jumped: (jump: Omit<ClockJump, 'steps'>) => void,
    /** The log holds times up to here already. */
    notBefore = '1970-01-01T00:00:00.000Z',
  ) {
    this.#wall = wall;
    this.#counterMs = counterMs;
    this.#jumped = jumped;
    this.#wallMs = wall().getTime();
    this.#countMs = counterMs();
    const earliest = Date.parse(notBefore);
    this.#lastMs = Math.max(this.#wallMs, earliest);
    this.#tell(this.#wallMs - earliest, this.#wallMs < earliest);
  }

  now(): Date {
    const wallMs = this.#wall().getTime();
    const countMs = this.#counterMs();
    const passedMs = countMs - this.#countMs;
    const setMs = wallMs - this.#wallMs - passedMs;
    this.#lastMs = Math.max(wallMs, Math.round(this.#lastMs + Math.max(0, passedMs)));
    this.#wallMs = wallMs;
    this.#countMs = countMs;
    this.#tell(setMs);
    return new Date(this.#lastMs);
  }

  #tell(setMs: number, matters = true): void {
    if (matters && Math.abs(setMs) >= JUMP_SECONDS * 1000)
      this.#jumped({ at: new Date(this.#lastMs).toISOString(), seconds: Math.round(setMs / 1000) });
  }
}
