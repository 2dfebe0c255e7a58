import { HERON_ANSWERS, HERON_CALIBRATION, HERON_NO_CODE, HERON_PANEL, HERON_SOUND_CHECKS } from './heron-h6.js';

/** A Heron H6 with a drain pump whose winding has shorted turns, and the same machine after the pump was replaced. */
export const HERON_MEND = `
format: refettle.scenario
version: 1
name: heron-mend
speed: 25
seed: 412
${HERON_PANEL}
lampPlans:
  find:
    - {show: ready, seconds: 6}
    - {show: code, on: 5, off: 3, repeats: 8}
    - {show: code, on: 2, off: 9, repeats: 8, next: true}
${HERON_NO_CODE}
${HERON_CALIBRATION}
lampsAt:
  before: {capture: find, watch: calibration}
  after: {capture: no-code, watch: calibration}
measurements:
  drain-pump-winding: {unit: ohm, before: [96.4], after: [157.7]}
${HERON_SOUND_CHECKS}
${HERON_ANSWERS}
answersAfter:
  repair: "yes"
repairs:
  repair:
    part: Drain pump
    partSource: {kind: new}
    minutes: 30
    costMinor: 2450
    note: Winding measured 96.4 ohm, new pump fitted.
`;
