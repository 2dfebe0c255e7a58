import { HERON_ANSWERS, HERON_CALIBRATION, HERON_NO_CODE, HERON_PANEL } from './heron-h6.js';

/** A sound Heron H6 on a bench with bad cables: probe lines get lost, and the meter fails once in every way before it reads. */
export const HERON_FLAKY = `
format: refettle.scenario
version: 1
name: heron-flaky
speed: 25
seed: 414
${HERON_PANEL}
lampPlans:
${HERON_NO_CODE}
${HERON_CALIBRATION}
lampsAt:
  before: {capture: no-code, watch: calibration}
  after: {capture: no-code, watch: calibration}
measurements:
  protective-conductor: {unit: ohm, before: [timeout, 0.084]}
  insulation: {unit: Mohm, before: [overload, 2.31]}
  drain-pump-winding: {unit: ohm, before: [garbage, 157.7]}
  heater: {unit: ohm, before: [nan, 26.8]}
  inlet-valve-coil: {unit: ohm, before: [3760]}
  protective-conductor-current: {unit: mA, before: [unplugged, 0.62]}
probeTrouble: {damaged: 0.01, missing: 0.01}
${HERON_ANSWERS}
`;
