import type { LampFace } from '../../shared/lamps/face.js';

type FaceLamp = LampFace['lamps'][number];

/** Distances of a large face in px; from a lamp to a hairline or the plate's edge, a selector needs room for its word. */
const FIRST_LAMP_X = 58;
const NEIGHBOURS = 48;
const TO_HAIRLINE = 27;
const SELECTOR_TO_HAIRLINE = 37;
const TO_EDGE = 24;
const SELECTOR_TO_EDGE = 34;

const besideHairline = (lamp: FaceLamp): number => (lamp.group === 'selector' ? SELECTOR_TO_HAIRLINE : TO_HAIRLINE);

/** Where the lamps of a face stand, in panel order, with a hairline between the groups. */
export function faceColumns(lamps: readonly FaceLamp[]): { lampX: number[]; hairlineX: number[]; width: number } {
  const lampX: number[] = [];
  const hairlineX: number[] = [];
  let x = FIRST_LAMP_X;
  lamps.forEach((lamp, index) => {
    const before = lamps[index - 1];
    if (before && before.group === lamp.group) x += NEIGHBOURS;
    else if (before) {
      hairlineX.push(x + besideHairline(before));
      x += besideHairline(before) + besideHairline(lamp);
    } else if (lamp.group === 'selector') {
      hairlineX.push(FIRST_LAMP_X - TO_EDGE);
      x += SELECTOR_TO_HAIRLINE - TO_EDGE;
    }
    lampX.push(x);
  });
  const last = lamps.at(-1);
  return { lampX, hairlineX, width: x + (last?.group === 'selector' ? SELECTOR_TO_EDGE : TO_EDGE) };
}

/** What is lit in which phase, for who cannot see it. */
export function describeFace(face: LampFace): string {
  const selector = face.lamps.find((lamp) => lamp.group === 'selector');
  const phases = face.rows.map((row) => {
    const lit = face.lamps.filter((lamp, index) => lamp.group === 'weighted' && row.lit[index] === true).map((lamp) => lamp.label);
    const selectorLit = selector !== undefined && row.lit[face.lamps.indexOf(selector)] === true;
    const phase = selector ? `${selector.label} ${selectorLit ? 'lit' : 'dark'}` : `Phase ${row.letter}`;
    return `${phase}: ${lit.length === 0 ? 'no other lamp' : listed(lit)} lit.`;
  });
  const outside = face.lamps.filter((lamp) => lamp.group === 'outside').map((lamp) => lamp.label);
  return [
    'Lamp face.',
    ...phases,
    ...(outside.length > 0 ? [`${listed(outside)} ${outside.length === 1 ? 'is' : 'are'} not in the sum.`] : []),
  ].join(' ');
}

const listed = (words: readonly string[]): string =>
  words.length < 2 ? words.join('') : `${words.slice(0, -1).join(', ')} and ${words.at(-1)}`;
