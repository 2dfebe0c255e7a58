import type { Sheet } from '../../shared/sheet/schema.js';
import { unitNumberText } from '../../shared/unit-number.js';
import { InvalidError } from '../errors.js';
import type { UnitHistory } from './unit-history.js';

/** The service sheet that a unit's work is judged by. `consequence`: what can't be done without one. */
export function sheetOf({ unit, sheet }: UnitHistory, consequence: string): Sheet {
  if (sheet) return sheet;
  const number = unitNumberText(unit.number);
  throw new InvalidError([
    {
      pointer: '',
      reason: `unit ${number} has no service sheet, so ${consequence}: give it its control family (refettle unit family ${number} FAMILY)`,
    },
  ]);
}
