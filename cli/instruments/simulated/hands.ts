import type { RepairBody } from '../../../shared/history/events.js';

/** What a technician would do with hands and eyes, played from a scenario. A bench run calls these on a simulated rig. */
export interface Hands {
  /** Puts the meter's probes where this check of the sheet is measured. Call before each measured step. */
  probesOn(checkId: string): void;
  /**
   * Brings the machine to what its lamps show next. `name` is a lamp plan of the scenario, or the id of the step about to begin;
   * the step's kind helps where the scenario does not know the name. Call before each capture and watch step.
   */
  lampsShow(name: string, kind?: 'capture' | 'watch'): void;
  /** When the technician presses "next" in what the lamps show now: microseconds since the start of the capture. */
  marks(): readonly number[];
  /** From now on the machine is the mended one. */
  repaired(): void;
  /** What is answered to a step's prompt; undefined where the scenario has no answer. */
  answer(stepId: string, kind: string): string | undefined;
  /** What a repair step records. */
  repairDetails(stepId: string): RepairBody | undefined;
}
