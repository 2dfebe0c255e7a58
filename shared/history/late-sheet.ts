import type { Sheet } from '../sheet/schema.js';

/**
 * The sheet that a run is settled by which was made with an older edition and comes after the newest: the newest, and from the older one
 * only the checks, procedures and calibration that the newest lacks. What the newest can judge or decode, it judges and decodes.
 *
 * Takes two editions of one family's sheet; refuses nothing.
 *
 * @example lateSheet(edition2, edition1).checks // those of edition 2, then those of edition 1 that it has no more
 */
export function lateSheet(newest: Sheet, older: Sheet): Sheet {
  const missing = <T extends { id: string }>(has: readonly T[], had: readonly T[]): T[] =>
    had.filter(({ id }) => !has.some((one) => one.id === id));
  const calibration = newest.calibration ?? older.calibration;
  return {
    ...newest,
    checks: [...newest.checks, ...missing(newest.checks, older.checks)],
    procedures: [...newest.procedures, ...missing(newest.procedures, older.procedures)],
    ...(calibration === undefined ? {} : { calibration }),
  };
}
