import { PROBE_CLOCK_SPAN_US, type ProbeSample } from './sample-line.js';

/** What a capture is made of: samples, and the places where lines were lost. Times in microseconds since the start of the capture. */
export type ProbeEvent = { kind: 'sample'; tUs: number; levels: number[] } | { kind: 'gap'; atUs: number; lost: number };

/** A hole is more than that many nominal periods without a sample (contract, section 6). */
const HOLE_PERIODS = 1.5;
/** A clock that falls by nearly its whole span has wrapped if no more than this is missing; otherwise the probe started again. */
const LONGEST_HOLE_OVER_A_WRAP_US = 60_000_000;

/**
 * Turns the probe's clock, which wraps and starts again with the probe, into one that only grows from 0, and says where lines were lost.
 *
 * A damaged line and the hole it leaves are one loss: the larger of the two counts stands. When the probe starts again, its clock
 * says nothing about the time that passed; the bench's clock does.
 */
export class SampleTimeline {
  readonly #periodUs: number;
  #last: { probeUs: number; benchUs: number; tUs: number } | undefined;
  #damaged = 0;

  constructor(sampleRateHz: number) {
    this.#periodUs = 1_000_000 / sampleRateHz;
  }

  /** Takes the next line, `undefined` where it was damaged, and when it came by the bench's clock. */
  push(sample: ProbeSample | undefined, benchUs: number): ProbeEvent[] {
    if (sample === undefined) {
      this.#damaged += 1;
      return [];
    }
    const step = this.#last === undefined ? undefined : this.#stepSince(this.#last, sample.tUs, benchUs);
    const missing = step === undefined ? 0 : step.restarted ? Math.max(1, this.#linesIn(step.us)) : this.#linesIn(step.us);
    const gap = this.#gap(missing);
    const tUs = this.#last === undefined || step === undefined ? 0 : this.#last.tUs + step.us;
    this.#last = { probeUs: sample.tUs, benchUs, tUs };
    return [...gap, { kind: 'sample', tUs, levels: sample.levels }];
  }

  /** What was lost after the last sample. */
  finish(): ProbeEvent[] {
    return this.#gap(0);
  }

  #gap(missing: number): ProbeEvent[] {
    const lost = Math.max(missing, this.#damaged);
    this.#damaged = 0;
    if (lost === 0) return [];
    return [{ kind: 'gap', atUs: this.#last === undefined ? 0 : this.#last.tUs + Math.round(this.#periodUs), lost }];
  }

  #linesIn(stepUs: number): number {
    return stepUs > HOLE_PERIODS * this.#periodUs ? Math.max(1, Math.round(stepUs / this.#periodUs) - 1) : 0;
  }

  #stepSince(last: { probeUs: number; benchUs: number }, probeUs: number, benchUs: number): { us: number; restarted: boolean } {
    if (probeUs >= last.probeUs) return { us: probeUs - last.probeUs, restarted: false };
    const overTheWrap = probeUs + PROBE_CLOCK_SPAN_US - last.probeUs;
    if (overTheWrap <= LONGEST_HOLE_OVER_A_WRAP_US) return { us: overTheWrap, restarted: false };
    // At least two periods, so that what is called a hole is one.
    return { us: Math.round(Math.max(2 * this.#periodUs, benchUs - last.benchUs)), restarted: true };
  }
}
