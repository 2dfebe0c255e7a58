import type { GateState } from '../../shared/readiness/gates.js';
import { GateError } from '../errors.js';

/** A shut gate refuses the write: its reasons, and the way through. */
export function refuseWhereShut(gate: GateState, what: string): void {
  if (!gate.open) throw new GateError(what, gate.reasons, gate.remedy);
}
