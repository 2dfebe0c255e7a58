import type { RepairBody } from '../../shared/history/events.js';
import { unitLabel } from './words.js';

/** Where a part came from, in words. */
export function sourceText(source: RepairBody['partSource']): string {
  if (source.kind === 'used') return `used, from ${unitLabel(source.fromUnit)}`;
  return source.kind === 'new' ? 'new' : 'no part changed';
}

/** @example repairText({ part: 'Drain pump', partSource: { kind: 'new' }, minutes: 30, costMinor: 2450 }) // 'Drain pump, new, 30 min' */
export const repairText = ({ part, partSource, minutes }: RepairBody): string => `${part}, ${sourceText(partSource)}, ${minutes} min`;
