import { LIVE_ROWS_AT_MOST } from '../../shared/api/live.js';

/** `[ms, level, level, …]`, levels in percent of full scale. */
export type LampRow = number[];

/** A lamp that flashes eight times a second still shows (a flash is lit for 0.06 s). */
const ROW_MS = 50;

/** Thins the samples of a probe to a row each twentieth of a second: the mean of what came in it. Keys are told as they are pressed. */
export class LampThinner {
  readonly #percent: (level: number) => number;
  readonly #byKeys: boolean;
  #slot: number | undefined;
  #sums: number[] = [];
  #count = 0;

  constructor({ scaleMax, byKeys }: { scaleMax: number; byKeys: boolean }) {
    this.#percent = (level) => Math.min(100, Math.max(0, Math.round((100 * level) / scaleMax)));
    this.#byKeys = byKeys;
  }

  /** The row that this sample completes; undefined where it completes none. */
  push(timeUs: number, levels: readonly number[]): LampRow | undefined {
    if (this.#byKeys) return [Math.round(timeUs / 1000), ...levels.map(this.#percent)];
    const slot = Math.floor(timeUs / 1000 / ROW_MS);
    const row = slot === this.#slot ? undefined : this.#row();
    if (slot !== this.#slot) {
      this.#slot = slot;
      this.#sums = levels.map(() => 0);
      this.#count = 0;
    }
    levels.forEach((level, lamp) => (this.#sums[lamp] = (this.#sums[lamp] ?? 0) + level));
    this.#count += 1;
    return row;
  }

  #row(): LampRow | undefined {
    if (this.#slot === undefined || this.#count === 0) return undefined;
    return [this.#slot * ROW_MS, ...this.#sums.map((sum) => this.#percent(sum / this.#count))];
  }
}

/** So many rows as go into one message: where there are more, neighbours become one, again and again. Nothing of the time is left out. */
export function fewerRows(rows: readonly LampRow[], most = LIVE_ROWS_AT_MOST): LampRow[] {
  let thinned = [...rows];
  while (thinned.length > most) {
    thinned = Array.from({ length: Math.ceil(thinned.length / 2) }, (_, pair) => {
      const first = thinned[2 * pair] as LampRow;
      const second = thinned[2 * pair + 1];
      return second ? first.map((value, at) => (at === 0 ? value : Math.round((value + (second[at] ?? value)) / 2))) : first;
    });
  }
  return thinned;
}
