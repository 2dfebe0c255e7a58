import { HERON_ANSWERS, HERON_CALIBRATION, HERON_NO_CODE, HERON_PANEL } from './heron-h6.js';

/**
 * A sound Heron H6 on a bench where plugs come out and instruments answer late, twice or behind an older value, all in a day's work: a run
 * gets through it. The plugs of meter and light probe are swapped, the probe is unplugged for 4 s and starts its clock again.
 */
export const HERON_CABLES = `
format: refettle.scenario
version: 1
name: heron-cables
speed: 25
seed: 415
${HERON_PANEL}
swapped: [meter, probe]
lampPlans:
${HERON_NO_CODE}
${HERON_CALIBRATION}
lampsAt:
  before: {capture: no-code, watch: calibration}
  after: {capture: no-code, watch: calibration}
measurements:
  protective-conductor: {unit: ohm, before: [{twice: 0.084}]}
  insulation: {unit: Mohm, before: [2.31]}
  drain-pump-winding: {unit: ohm, before: [{stale: 157.7}, 157.7]}
  heater: {unit: ohm, before: [{unplugged: 10}, 26.8]}
  inlet-valve-coil: {unit: ohm, before: [{nuls: 3760}]}
  protective-conductor-current: {unit: mA, before: [{unplugged: 5}, 0.62]}
probeFaults:
  - {fault: unplug, at: 12, seconds: 4}
  - {fault: restart, at: 30}
${HERON_ANSWERS}
`;
