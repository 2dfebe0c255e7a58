import { z } from 'zod';
import type { UnitEvent } from '../history/events.js';

export const stageSchema = z.enum(['intake', 'testing', 'repair', 'proving', 'signed off', 'sold', 'returned']);
export type Stage = z.infer<typeof stageSchema>;

/**
 * A unit's stage, derived from what happened and never typed in.
 *
 * Takes the unit's events, oldest first. A withdrawn tag puts the unit back where it stood before the sign-off;
 * a failed proof run puts it back to repair.
 *
 * @example stageOf([intake]) // 'intake'
 */
export function stageOf(events: readonly UnitEvent[]): Stage {
  let stage: Stage = 'intake';
  let beforeSignOff: Stage = 'intake';
  for (const event of events) {
    switch (event.kind) {
      case 'intake':
        stage = 'intake';
        break;
      case 'returned':
        stage = 'returned';
        break;
      case 'capture':
      case 'reading':
      case 'inspection':
        if (stage === 'intake' || stage === 'returned') stage = 'testing';
        break;
      case 'run began':
        if (event.prove) stage = 'proving';
        else if (stage === 'intake' || stage === 'returned') stage = 'testing';
        break;
      case 'run ended':
        if (event.prove && event.verdict === 'fail') stage = 'repair';
        break;
      case 'repair':
      case 'part removed':
        stage = 'repair';
        break;
      case 'sign-off':
        beforeSignOff = stage;
        stage = 'signed off';
        break;
      case 'tag withdrawn':
        if (stage === 'signed off') stage = beforeSignOff;
        break;
      case 'sold':
        stage = 'sold';
        break;
      case 'calibration':
      case 'codes cleared':
      case 'note':
      case 'override':
        break;
    }
  }
  return stage;
}
