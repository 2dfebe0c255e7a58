import type { ReadingBody } from '../../shared/history/events.js';
import type { MeasuredCheck } from '../../shared/sheet/schema.js';
import type { Style } from '../output.js';
import { indented } from './columns.js';
import { meterScale } from './meter-scale.js';

const INDENT = ' '.repeat(11);

/**
 * A reading on its meter scale, and what to do where it did not pass. A safety reading that is close gets an instruction, not a
 * probability (gate 5).
 */
export function readingLines(reading: ReadingBody, check: Pick<MeasuredCheck, 'safety' | 'part'>, style: Style): string[] {
  const scale = meterScale(reading.judgement, style).map((line) => `${INDENT}${line}`);
  const words = adviceFor(reading, check);
  return words === undefined ? scale : [...scale, ...indented([words], style.columns)];
}

function adviceFor({ judgement, instrument }: ReadingBody, { safety, part }: Pick<MeasuredCheck, 'safety' | 'part'>): string | undefined {
  const meter = instrument?.id ?? 'This meter';
  if (judgement.verdict === 'inconclusive') {
    const likely = safety ? '' : `: ${Math.round(judgement.conformanceProbability * 100)} % likely inside`;
    return `${meter} can't decide this close to the limit${likely}. Measure with a meter of smaller uncertainty.`;
  }
  if (judgement.verdict === 'fail')
    return safety
      ? 'It stops here until the machine is mended.'
      : `Outside its limits${part === undefined ? '' : `: suspect the ${part.toLowerCase()}`}.`;
  return undefined;
}
