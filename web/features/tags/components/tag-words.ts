import type { TagContent } from '../../../../shared/api/tags.js';
import { formatDate } from '../../../lib/format.js';

/** `230 V 50 Hz 2050 W 68 kg`, what of it the plate has. */
export function plateInWords(plate: TagContent['plate']): string {
  return [
    [plate.volts, 'V'],
    [plate.hertz, 'Hz'],
    [plate.watts, 'W'],
    [plate.massKg, 'kg'],
  ]
    .flatMap(([value, unit]) => (value === undefined ? [] : [`${value} ${unit}`]))
    .join(' ');
}

/** `Drain pump replaced 5 Mar 2026, a used part, by Wil.` */
export function mendedInWords({ part, source, at, by }: TagContent['mended'][number]): string {
  if (source === 'none') return `${part}, ${formatDate(at)}, by ${by}.`;
  return `${part} replaced ${formatDate(at)}, a ${source} part, by ${by}.`;
}

/** A British number as a telephone dials it from anywhere; others as they are written, without blanks. */
export function telephoneLink(phone: string): string {
  return `tel:${phone.replace(/[^\d+]/g, '')}`;
}
