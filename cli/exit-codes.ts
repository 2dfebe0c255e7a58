/** Exit codes of the terminal (contract, section 5). */
export const EXIT = { good: 0, notGood: 1, usage: 2, badInput: 3, instrument: 4, server: 5, fault: 70, stopped: 130 } as const;

/** Where several apply, the first of these (contract, section 5): a failed run whose result still waits for the network is 1. */
const FIRST_FIRST: readonly number[] = [EXIT.usage, EXIT.fault, EXIT.stopped, EXIT.badInput, EXIT.instrument, EXIT.notGood, EXIT.server];

/** The exit code where several apply; 0 where none does. */
export function firstExitCode(codes: readonly number[]): number {
  return FIRST_FIRST.find((code) => codes.includes(code)) ?? EXIT.good;
}
