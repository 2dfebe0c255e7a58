import { PROBE_CLOCK_SPAN_US, type ProbeSample } from './sample-line.js';

/** What a capture is made of: samples, and the places where lines were lost. Times in microseconds since the start of the capture. */
export type ProbeEvent = { kind: 'sample'; tUs: number; levels: number[] } | { kind: 'gap'; atUs: number; lost: number };

/** A hole is more than that many nominal periods without a sample (contract, section 6). */
const HOLE_PERIODS = 1.5;
/** A clock that falls by nearly its whole span has wrapped if no more than this is missing; otherwise the probe started again. */
const LONGEST_HOLE_OVER_A_WRAP_US = 60_000_000;

/** How far a sample may be ahead of what the bench's clock allows before its time is doubted: buffers, and two clocks that differ. */
const MAY_BE_AHEAD_US = 2_000_000;
/** After the port was away, probe and bench must agree on how long that was: within this, and within that share of it. */
const AGREE_WITHIN_US = 500_000;
const AGREE_WITHIN_SHARE = 0.05;

interface Seen {
  probeUs: number;
  benchUs: number;
}

/**
 * Turns the probe's clock, which wraps and starts again with the probe, into one that only grows from 0, and says where lines were lost.
 *
 * A damaged line and the hole it leaves are one loss: the larger of the two counts stands. When the probe starts again, its clock
 * says nothing about the time that passed; the bench's clock does.
 *
 * A check of eight bits lets some damage through. A time that falls, or jumps ahead of the bench's clock, is therefore held back until
 * the next line goes on from it; if none does, it was damage.
 */
export class SampleTimeline {
  readonly #periodUs: number;
  #first: number | undefined;
  #last: (Seen & { tUs: number }) | undefined;
  #held: { sample: ProbeSample; benchUs: number } | undefined;
  #damaged = 0;
  #wasAway = false;

  constructor(sampleRateHz: number) {
    this.#periodUs = 1_000_000 / sampleRateHz;
  }

  /** Takes the next line, `undefined` where it was damaged, and when it came by the bench's clock. */
  push(sample: ProbeSample | undefined, benchUs: number): ProbeEvent[] {
    if (sample === undefined) {
      this.#damaged += 1;
      return [];
    }
    const held = this.#held;
    this.#held = undefined;
    if (this.#last === undefined) return this.#begin(sample, benchUs);
    if (held !== undefined && goesOn(held.sample.tUs, sample.tUs))
      return [...this.#restart(this.#last, held.sample, held.benchUs), ...this.push(sample, benchUs)];
    // Nothing went on from what was held back: it was damage.
    if (held !== undefined) this.#damaged += 1;
    const step = stepOf(this.#last.probeUs, sample.tUs);
    if (step === undefined || !this.#isPlausible(step, this.#last, benchUs)) {
      this.#held = { sample, benchUs };
      return [];
    }
    return this.#add(this.#last, sample, benchUs, step, this.#linesIn(step));
  }

  /** The port was away: how long, the bench's clock tells, unless the probe's agrees. */
  away(): void {
    this.#wasAway = true;
  }

  /** What was lost after the last sample. */
  finish(): ProbeEvent[] {
    if (this.#held !== undefined) this.#damaged += 1;
    this.#held = undefined;
    return this.#gap(0);
  }

  #begin(sample: ProbeSample, benchUs: number): ProbeEvent[] {
    this.#first = benchUs;
    const gap = this.#gap(0);
    this.#last = { probeUs: sample.tUs, benchUs, tUs: 0 };
    return [...gap, { kind: 'sample', tUs: 0, levels: sample.levels }];
  }

  #restart(last: Seen & { tUs: number }, sample: ProbeSample, benchUs: number): ProbeEvent[] {
    // At least two periods, so that what is called a hole is one.
    const step = Math.round(Math.max(2 * this.#periodUs, benchUs - last.benchUs));
    return this.#add(last, sample, benchUs, step, Math.max(1, this.#linesIn(step)));
  }

  #add(last: { tUs: number }, sample: ProbeSample, benchUs: number, stepUs: number, missing: number): ProbeEvent[] {
    this.#wasAway = false;
    const gap = this.#gap(missing);
    const tUs = last.tUs + stepUs;
    this.#last = { probeUs: sample.tUs, benchUs, tUs };
    return [...gap, { kind: 'sample', tUs, levels: sample.levels }];
  }

  #isPlausible(stepUs: number, last: Seen & { tUs: number }, benchUs: number): boolean {
    const benchStepUs = benchUs - last.benchUs;
    if (this.#wasAway) return Math.abs(stepUs - benchStepUs) <= AGREE_WITHIN_US + AGREE_WITHIN_SHARE * benchStepUs;
    // Lines may come late and all at once (a terminal that was stopped): the whole time since the first one counts too.
    const behindUs = benchUs - (this.#first ?? benchUs) - last.tUs;
    return stepUs <= Math.max(benchStepUs, behindUs, 0) + MAY_BE_AHEAD_US;
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
}

/** How far the probe's clock went on, over its wrap if need be; undefined where it fell. */
function stepOf(fromUs: number, toUs: number): number | undefined {
  if (toUs >= fromUs) return toUs - fromUs;
  const overTheWrap = toUs + PROBE_CLOCK_SPAN_US - fromUs;
  return overTheWrap <= LONGEST_HOLE_OVER_A_WRAP_US ? overTheWrap : undefined;
}

function goesOn(fromUs: number, toUs: number): boolean {
  const step = stepOf(fromUs, toUs);
  return step !== undefined && step <= MAY_BE_AHEAD_US;
}
