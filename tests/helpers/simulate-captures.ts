import type { Capture } from '../../shared/lamps/capture.js';
import { codeStates, readyBlinkStates } from '../../shared/lamps/panel-states.js';
import { simulateLamps, type LampState, type SimulatedLight } from '../../shared/lamps/simulate-lamps.js';
import type { Sheet } from '../../shared/sheet/schema.js';

/** What the panel showed: the codes a decoder should state, with their whole repeats. */
export interface Truth {
  codes: { code: string; repeats: number }[];
}

export interface PlannedCode {
  on: number;
  off: number;
  repeats: number;
  /** Presses "next" before it. */
  marked?: boolean;
  /** Darkness before it, seconds. */
  pauseS?: number;
}

export interface CapturePlan {
  ready?: { times: number; periodS: number } | undefined;
  codes: readonly PlannedCode[];
  phaseS: number;
  /** Each phase is up to this share longer or shorter than the one before, inside the sheet's band. */
  phaseVariation?: number;
  leadS?: number;
  tailS?: number;
  lockLit?: boolean;
  /** How early or late a mark is pressed, seconds. */
  markOffsetS?: number;
  light: Omit<SimulatedLight, 'lamps' | 'scaleMax'> & { scaleMax?: number };
  columns?: readonly string[];
}

/** Plays a plan on the sheet's panel and records it as a probe would; the truth beside it. For weighted-phases sheets. */
export function simulateCapture(plan: CapturePlan, sheet: Sheet, random: () => number): { capture: Capture; truth: Truth } {
  const coding = sheet.coding;
  if (coding.kind !== 'weighted-phases') throw new TypeError('weighted-phases sheets only');
  const states: LampState[] = [{ seconds: plan.leadS ?? 0.4, lit: [] }];
  const marks: number[] = [];
  const lock = plan.lockLit === true ? ['lock'] : [];
  const nowS = (): number => states.reduce((sum, state) => sum + state.seconds, 0);
  if (plan.ready)
    states.push(...readyBlinkStates(sheet.ready?.lamps ?? [], plan.ready.times, plan.ready.periodS), { seconds: 0.3, lit: [] });
  let phaseS = plan.phaseS;
  const [leastS, mostS] = coding.phaseS;
  plan.codes.forEach((code) => {
    if (code.pauseS !== undefined) states.push({ seconds: code.pauseS, lit: [] });
    if (code.marked === true) marks.push(nowS() + (random() * 2 - 1) * (plan.markOffsetS ?? 0));
    const lengths = Array.from({ length: 2 * code.repeats }, () => {
      phaseS = Math.min(mostS, Math.max(leastS, phaseS * (1 + (random() * 2 - 1) * (plan.phaseVariation ?? 0))));
      return phaseS;
    });
    states.push(...codeStates(coding, code.on, code.off, lengths, lock));
  });
  states.push({ seconds: plan.tailS ?? 0.7, lit: [] });
  const startS = plan.light.startS ?? 0;
  const capture = record(
    states,
    { ...plan.light, lamps: sheet.lamps.map((lamp) => lamp.id), scaleMax: plan.light.scaleMax ?? 1023 },
    random,
  );
  capture.marks.push(...marks.map((atS) => ({ atUs: Math.max(0, Math.round((atS - startS) * 1e6)), label: 'next' })));
  return {
    capture,
    truth: {
      codes: plan.codes.map(({ on, off, repeats }) => ({
        code: coding.code.replace('{on}', String(on)).replace('{off}', String(off)),
        repeats,
      })),
    },
  };
}

/** Records states as a whole capture, with `end` and what was lost. */
export function record(states: readonly LampState[], light: SimulatedLight, random: () => number): Capture {
  const capture: Capture = {
    header: {
      format: 'refettle.lamps',
      version: 1,
      capturedAt: '2026-03-03T10:42:00Z',
      source: 'simulated',
      lamps: [...light.lamps],
      scale: { unit: 'counts', max: light.scaleMax },
      sampleRateHz: light.sampleRateHz,
    },
    timesUs: [],
    levels: light.lamps.map(() => []),
    marks: [],
    gaps: [],
    cut: false,
  };
  for (const { timeUs, levels } of simulateLamps(states, light, random)) {
    capture.timesUs.push(timeUs);
    levels.forEach((level, column) => capture.levels[column]?.push(level));
  }
  const totalS = states.reduce((sum, state) => sum + state.seconds, 0) - (light.startS ?? 0);
  capture.endUs = Math.max(Math.round(totalS * 1e6), capture.timesUs.at(-1) ?? 0);
  return capture;
}
