import type { InspectionBody, RepairBody } from '../../shared/history/events.js';

/** Whoever is at the bench: a person at the terminal, or the one of a simulated rig. */
export interface Technician {
  /** Somebody real sits there. */
  readonly attended: boolean;
  /** A caution: waits for yes or no, and has no default. */
  confirms(stepId: string, text: string): Promise<'yes' | 'no'>;
  /** An instruction was carried out, or not. */
  hasDone(stepId: string, kind: string, question: string): Promise<boolean>;
  looks(stepId: string, question: string): Promise<Pick<InspectionBody, 'verdict' | 'note'>>;
  /** Undefined: nothing was mended. */
  mended(stepId: string, asked: { part: string | undefined; optional: boolean; parts: readonly string[] }): Promise<RepairBody | undefined>;
  remarks(stepId: string, question: string): Promise<string>;
  /** A reading from a meter that hangs on no port. */
  reads(stepId: string, what: { title: string; quantity: string; unit: string }): Promise<TypedReading>;
  /** After something went wrong: try again, or give it up. */
  triesAgain(stepId: string, why: string): Promise<boolean>;
}

/** As typed in: figures are still text. */
export interface TypedReading {
  value: string;
  accuracy: string;
  resolution: string;
  meter?: string | undefined;
}
