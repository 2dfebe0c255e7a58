import type { DecodeAnswer, DecodeView } from '../../../../shared/decode/answer.js';
import type { Sheet } from '../../../../shared/sheet/schema.js';
import { WEAK_BELOW } from './strip-geometry.js';

/** A probability of being wrong as it is said: `1 in 700`; rounded to one figure, thousands apart. */
export function oneIn(confidence: number): string {
  const odds = 1 / Math.max(1e-9, 1 - confidence);
  const figure = 10 ** Math.floor(Math.log10(odds) + 1e-9);
  // A thin space would be lost in the mono face; a plain blank reads as well.
  return `1 in ${String(Math.round(odds / figure) * figure).replace(/\B(?=(\d{3})+$)/g, ' ')}`;
}

/** What the capture says about the lamps themselves: burnt out, weak, lost lines, and the decoder's warnings. */
export function aboutTheLamps(answer: DecodeAnswer, view: DecodeView, sheet: Sheet, cut: boolean): string[] {
  const labelOf = (id: string): string => sheet.lamps.find((lamp) => lamp.id === id)?.label ?? id;
  const ready = answer.segments.some((segment) => segment.kind === 'ready');
  const weak = view.lamps.filter((lamp) => lamp.litFraction !== null && lamp.litFraction < WEAK_BELOW);
  return [
    answer.deadLamps.length > 0
      ? `${answer.deadLamps.map(labelOf).join(', ')} stayed dark in the ready blink: perhaps burnt out. Codes that it could change are not stated.`
      : ready
        ? 'All lamps of the ready blink lit together: none of them is burnt out.'
        : 'No ready blink in this capture: a burnt-out lamp would not show.',
    ...weak.map(
      (lamp) => `${labelOf(lamp.id)} is weak, ${Math.round((lamp.litFraction ?? 0) * 100)} % of full scale: clean the sensor or move it.`,
    ),
    ...(answer.lost > 0 ? [`${answer.lost} probe lines were lost.`] : []),
    ...(cut ? ['The capture was cut short: it has no end.'] : []),
    ...answer.warnings.map((warning) => `${warning.charAt(0).toUpperCase()}${warning.slice(1)}.`),
  ];
}

/** Which lamps outside the code were lit for most of a stretch. */
export function seenOutside(view: DecodeView, stretch: { fromS: number; toS: number }): Record<string, boolean> {
  const length = stretch.toS - stretch.fromS;
  return Object.fromEntries(
    view.lamps.map((lamp) => {
      const litS = lamp.lit.reduce(
        (sum, { fromS, toS }) => sum + Math.max(0, Math.min(toS, stretch.toS) - Math.max(fromS, stretch.fromS)),
        0,
      );
      return [lamp.id, litS > length / 2];
    }),
  );
}
