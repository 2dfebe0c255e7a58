import type { Capture, CaptureHeader } from '../../shared/lamps/capture.js';
import type { ProbeEvent } from '../instruments/rig.js';
import { COLUMNS_PER_SECOND } from '../render/lanes.js';

/** How much of a capture is looked at while it goes on; the file has it all. Long enough for every code a dozen times. */
const WINDOW_SECONDS = 120;
const COLUMN_US = 1_000_000 / COLUMNS_PER_SECOND;
/** Samples older than the window are thrown away in batches, so that each sample is moved a few times at most. */
const SLACK = 1.25;

interface Column {
  index: number;
  sums: number[];
  count: number;
}

/** The last two minutes of a capture that is going on: what the live view draws and decodes. Its memory is bounded. */
export class LampWindow {
  readonly header: CaptureHeader;
  readonly #spanUs: number;
  #times: number[] = [];
  #levels: number[][];
  #columns: Column[] = [];
  #marks: { atUs: number; label: string }[] = [];
  #gaps: { atUs: number; lost: number }[] = [];
  samples = 0;
  lost = 0;

  constructor(header: CaptureHeader, windowSeconds: number = WINDOW_SECONDS) {
    this.header = header;
    this.#spanUs = windowSeconds * 1_000_000;
    this.#levels = header.lamps.map(() => []);
  }

  get lastUs(): number {
    return this.#times.at(-1) ?? 0;
  }

  /** The newest level of each lamp, 0 to 1 of full scale. */
  get now(): number[] {
    return this.#levels.map((levels) => (levels.at(-1) ?? 0) / this.header.scale.max);
  }

  push(event: ProbeEvent): void {
    if (event.kind === 'gap') {
      this.#gaps.push({ atUs: event.atUs, lost: event.lost });
      this.lost += event.lost;
      return;
    }
    this.samples += 1;
    this.#times.push(event.tUs);
    event.levels.forEach((level, lamp) => this.#levels[lamp]?.push(level));
    const index = Math.floor(event.tUs / COLUMN_US);
    let column = this.#columns.at(-1);
    if (column?.index !== index) {
      column = { index, sums: event.levels.map(() => 0), count: 0 };
      this.#columns.push(column);
    }
    event.levels.forEach((level, lamp) => (column.sums[lamp] = (column.sums[lamp] ?? 0) + level));
    column.count += 1;
    this.#forget();
  }

  mark(atUs: number, label: string): void {
    this.#marks.push({ atUs, label });
  }

  get marks(): readonly { atUs: number; label: string }[] {
    return this.#marks;
  }

  /** The mean level of each lamp in the last `count` columns, 0 to 1 of full scale, and when the first of them begins. A column without a sample holds what stood before. */
  columns(count: number, untilUs: number = this.lastUs): { fromS: number; levels: number[][] } {
    const last = Math.max(this.#columns.at(-1)?.index ?? 0, Math.floor(untilUs / COLUMN_US));
    const first = Math.max(0, last - count + 1);
    const levels: number[][] = this.#levels.map(() => []);
    let at = this.#columns.findLastIndex((column) => column.index <= first);
    for (let index = first; index <= last; index += 1) {
      while ((this.#columns[at + 1]?.index ?? Infinity) <= index) at += 1;
      const column = this.#columns[at];
      // By keys a level holds until the next one; of a probe a column without samples was lost, and holds what stood before.
      levels.forEach((lane, lamp) =>
        lane.push(
          column === undefined
            ? 0
            : index > column.index && column === this.#columns.at(-1)
              ? (this.now[lamp] ?? 0)
              : (column.sums[lamp] ?? 0) / column.count / this.header.scale.max,
        ),
      );
    }
    return { fromS: first / COLUMNS_PER_SECOND, levels };
  }

  /** The window as a capture of its own, and where it begins in the whole one. */
  capture(): { capture: Capture; fromUs: number } {
    const fromUs = this.#times[0] !== undefined && this.lastUs - this.#times[0] >= this.#spanUs ? this.#times[0] : 0;
    const shift = <T extends { atUs: number }>(entries: readonly T[]): T[] =>
      entries.filter(({ atUs }) => atUs >= fromUs).map((entry) => ({ ...entry, atUs: entry.atUs - fromUs }));
    return {
      fromUs,
      capture: {
        header: this.header,
        timesUs: fromUs === 0 ? this.#times : this.#times.map((time) => time - fromUs),
        levels: this.#levels,
        marks: shift(this.#marks),
        gaps: shift(this.#gaps),
        endUs: this.lastUs - fromUs,
        cut: false,
      },
    };
  }

  #forget(): void {
    const first = this.#times[0] ?? 0;
    if (this.lastUs - first < SLACK * this.#spanUs) return;
    const keepFrom = this.lastUs - this.#spanUs;
    const drop = this.#times.findIndex((time) => time >= keepFrom);
    this.#times.splice(0, drop);
    for (const levels of this.#levels) levels.splice(0, drop);
    this.#columns = this.#columns.filter(({ index }) => (index + 1) * COLUMN_US >= keepFrom);
    this.#marks = this.#marks.filter(({ atUs }) => atUs >= keepFrom);
    this.#gaps = this.#gaps.filter(({ atUs }) => atUs >= keepFrom);
  }
}
