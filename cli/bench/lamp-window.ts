import type { Capture, CaptureHeader } from '../../shared/lamps/capture.js';
import type { ProbeEvent } from '../instruments/rig.js';
import { COLUMNS_PER_SECOND } from '../render/lanes.js';

/** How much of a capture is looked at while it goes on; the file has it all. Long enough for every code a dozen times. */
const WINDOW_SECONDS = 120;
const COLUMN_US = 1_000_000 / COLUMNS_PER_SECOND;
/** Samples older than the window are thrown away in batches, so that each sample is moved a few times at most. */
const SLACK = 1.25;

/** A ready blink is kept up to this length: more of it proves no more. */
const PROOF_AT_MOST_US = 20_000_000;
/** Between the blink that is kept and what follows: longer than any phase, so that neither is taken for a part of the other. */
const PROOF_PAUSE_US = 3_000_000;

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
  #proof: { fromUs: number; toUs: number; times: number[]; levels: number[][] } | undefined;
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

  /** The lamps were proved here: they stay so when it has left the window (gate 4). */
  keepProof(fromUs: number, toUs: number): void {
    if (toUs <= (this.#proof?.toUs ?? -1)) return;
    const inIt = (time: number): boolean => time >= Math.max(fromUs, toUs - PROOF_AT_MOST_US) && time <= toUs;
    const first = this.#times.findIndex(inIt);
    const last = this.#times.findLastIndex(inIt);
    if (first < 0) return;
    this.#proof = {
      fromUs: this.#times[first] ?? fromUs,
      toUs,
      times: this.#times.slice(first, last + 1),
      levels: this.#levels.map((levels) => levels.slice(first, last + 1)),
    };
  }

  /**
   * The window as a capture of its own, where it begins in the whole one, and from when on it shows the window: before that stands,
   * where it is asked for, the proof of the lamps, moved up to it.
   */
  capture({ withProof = false } = {}): { capture: Capture; fromUs: number; shownFromUs: number } {
    const first = this.#times[0];
    const windowFromUs = first !== undefined && this.lastUs - first >= this.#spanUs ? first : 0;
    const proof = withProof && this.#proof !== undefined && this.#proof.fromUs < windowFromUs ? this.#proof : undefined;
    const proofUs = proof === undefined ? 0 : proof.toUs - proof.fromUs + PROOF_PAUSE_US;
    const fromUs = windowFromUs - proofUs;
    const shift = <T extends { atUs: number }>(entries: readonly T[]): T[] =>
      entries.filter(({ atUs }) => atUs >= windowFromUs).map((entry) => ({ ...entry, atUs: entry.atUs - fromUs }));
    return {
      fromUs,
      shownFromUs: windowFromUs,
      capture: {
        header: this.header,
        timesUs: [
          ...(proof?.times.map((time) => time - proof.fromUs) ?? []),
          ...(fromUs === 0 ? this.#times : this.#times.map((time) => time - fromUs)),
        ],
        levels: this.#levels.map((levels, lamp) => (proof ? [...(proof.levels[lamp] ?? []), ...levels] : levels)),
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
