/** An insulation test puts 500 V on the wiring and ends with discharge (gate 2; 50 V: common practice, no published source). */
export const DISCHARGE = 'Discharge it now through the tester, wait, measure: below 50 V before anybody touches anything.';
/** For whoever leaves a run there, comes back to it or closes it. */
export const MAY_BE_CHARGED = `The machine may hold the charge of its insulation test: no discharge is written down after it. ${DISCHARGE}`;
/** What becomes of the reading. */
export const COUNTS_DISCHARGED =
  'It is written down as a test without its discharge, and does not count: discharge the machine, then do it again.';
