import { LIVE_ROWS_AT_MOST } from '../../shared/api/live.js';

/** `[ms, level, level, …]`, levels in percent of full scale. */
export type LampRow = number[];

/** A lamp that flashes eight times a second still shows (a flash is lit for 0.06 s). */
const ROW_MS = 50;
/** A lamp that goes on or off changes by more; noise and glow by less. */
const EDGE_PERCENT = 15;
/** So many samples in a row stand for an edge: one alone is flicker or a mangled line. */
const EDGE_SAMPLES = 2;

/**
 * Thins the samples of a probe to a row each twentieth of a second: the mean of what came in it. An edge is not kept waiting for that: as
 * soon as it is one, it has a row of its own. Keys are told as they are pressed.
 */
export class LampThinner {
  readonly #percent: (level: number) => number;
  readonly #byKeys: boolean;
  #slot: number | undefined;
  #sums: number[] = [];
  #count = 0;
  /** What was told last, and the samples since then that differ from it. */
  #told: number[] | undefined;
  #toldMs = -1;
  #edge: number[][] = [];
  /** The row that was completed last tells an edge. */
  tellsEdge = false;

  constructor({ scaleMax, byKeys }: { scaleMax: number; byKeys: boolean }) {
    this.#percent = (level) => Math.min(100, Math.max(0, Math.round((100 * level) / scaleMax)));
    this.#byKeys = byKeys;
  }

  /** The row that this sample completes; undefined where it completes none. */
  push(timeUs: number, levels: readonly number[]): LampRow | undefined {
    this.tellsEdge = this.#byKeys;
    if (this.#byKeys) return [Math.round(timeUs / 1000), ...levels.map(this.#percent)];
    const edge = this.#edgeRow(timeUs, levels);
    if (edge) return this.#tell(edge);
    const slot = Math.floor(timeUs / 1000 / ROW_MS);
    const row = slot === this.#slot ? undefined : this.#row();
    if (slot !== this.#slot) {
      this.#slot = slot;
      this.#sums = levels.map(() => 0);
      this.#count = 0;
    }
    levels.forEach((level, lamp) => (this.#sums[lamp] = (this.#sums[lamp] ?? 0) + level));
    this.#count += 1;
    return row && this.#tell(row);
  }

  /** Undefined: no edge, or not yet. What came of its slot until then is in it. */
  #edgeRow(timeUs: number, levels: readonly number[]): LampRow | undefined {
    const told = this.#told;
    const percents = levels.map(this.#percent);
    const differ = (one: readonly number[]): boolean =>
      percents.some((percent, lamp) => Math.abs(percent - (one[lamp] ?? percent)) > EDGE_PERCENT);
    if (!told || !differ(told)) {
      this.#edge = [];
      return undefined;
    }
    // They must agree with one another.
    if (this.#edge[0] && differ(this.#edge[0])) this.#edge = [];
    this.#edge.push(percents);
    const ms = Math.floor(timeUs / 1000);
    if (this.#edge.length < EDGE_SAMPLES || ms <= this.#toldMs) return undefined;
    const row = [
      ms,
      ...percents.map((_, lamp) => Math.round(this.#edge.reduce((sum, one) => sum + (one[lamp] ?? 0), 0) / this.#edge.length)),
    ];
    this.#edge = [];
    this.#slot = Math.floor(ms / ROW_MS);
    this.#sums = levels.map(() => 0);
    this.#count = 0;
    this.tellsEdge = true;
    return row;
  }

  #tell(row: LampRow): LampRow | undefined {
    const [ms = 0, ...percents] = row;
    // An edge was told inside this slot: time goes on from there.
    if (ms <= this.#toldMs) return undefined;
    this.#toldMs = ms;
    this.#told = percents;
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
