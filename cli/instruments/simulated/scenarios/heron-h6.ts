/** What the scenarios of the Heron H6 share: the panel, and a machine that has nothing wrong. The machine, its values and its maker are invented. */
export const HERON_PANEL = `
family: heron-h6
panel:
  lamps: [fill, wash, rinse, drain, spin, lock]
  ready: [fill, wash, rinse, drain, spin]
  selector: spin
  weights: {fill: 1, wash: 2, rinse: 4, drain: 8}
`;

/** The ready blink and nothing else: no code is stored. */
export const HERON_NO_CODE = `
  no-code:
    - {show: ready, seconds: 25}
`;

/** The calibration cycle: the lid locks for 150 s, then the control switches itself off. */
export const HERON_CALIBRATION = `
  calibration:
    - {show: lit, lamps: [], seconds: 2}
    - {show: lit, lamps: [lock], seconds: 150}
    - {show: lit, lamps: [], seconds: 10}
`;

/** Dead tests and energised check of a sound machine. */
export const HERON_SOUND_CHECKS = `
  protective-conductor: {unit: ohm, before: [0.084]}
  insulation: {unit: Mohm, before: [2.31]}
  heater: {unit: ohm, before: [26.8]}
  inlet-valve-coil: {unit: ohm, before: [3760]}
  protective-conductor-current: {unit: mA, before: [0.62]}
`;

/** A technician who looks, finds nothing to stop for, and does as told. */
export const HERON_ANSWERS = `
answers:
  caution: "yes"
  instruct: done
  inspect: pass
  clear: done
  note: All as it should be.
`;
