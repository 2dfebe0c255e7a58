import type { RepairBody } from '../shared/history/events.js';
import { UsageError } from './errors.js';

/**
 * Where a part came from, as it is typed: `new`, `used:0388` (the unit it came from), or `none`.
 *
 * @example parsePartSource('used:0388') // { kind: 'used', fromUnit: 388 }
 */
export function parsePartSource(text: string): RepairBody['partSource'] {
  const source = text.trim().toLowerCase();
  if (source === 'new' || source === 'none') return { kind: source };
  const unit = Number(/^used:\s*(?:no\.?\s*)?(\d{1,9})$/.exec(source)?.[1]);
  if (unit > 0) return { kind: 'used', fromUnit: unit };
  throw new UsageError(`'${text}' is no source of a part: write new, used:NUMBER with the unit it came from, or none`);
}
