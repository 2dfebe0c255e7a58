import { HERON_ANSWERS, HERON_CALIBRATION, HERON_NO_CODE, HERON_PANEL, HERON_SOUND_CHECKS } from './heron-h6.js';

/** A Heron H6 with nothing wrong. */
export const HERON_GOOD = `
format: refettle.scenario
version: 1
name: heron-good
speed: 25
seed: 413
${HERON_PANEL}
lampPlans:
${HERON_NO_CODE}
${HERON_CALIBRATION}
lampsAt:
  before: {capture: no-code, watch: calibration}
  after: {capture: no-code, watch: calibration}
measurements:
  drain-pump-winding: {unit: ohm, before: [157.7]}
${HERON_SOUND_CHECKS}
${HERON_ANSWERS}
`;
