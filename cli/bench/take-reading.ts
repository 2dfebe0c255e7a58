import { BadInputError } from '../../shared/errors.js';
import type { ReadingBody } from '../../shared/history/events.js';
import { settleReading } from '../../shared/history/settle-reading.js';
import { parseAccuracy } from '../../shared/measure/parse-accuracy.js';
import { parseQuantity } from '../../shared/measure/parse-quantity.js';
import { energisingOfCheck } from '../../shared/script/energised.js';
import type { MeasuredCheck, Sheet } from '../../shared/sheet/schema.js';
import type { OpenRig } from '../instruments/rig.js';
import type { Technician, TypedReading } from './technician.js';

/** A reading of a check, judged by the sheet: from the rig's meter, or typed in where the rig has none for it. */
export async function takeReading(
  check: MeasuredCheck,
  sheet: Sheet,
  rig: OpenRig,
  technician: Technician,
  stepId: string,
): Promise<ReadingBody> {
  if (!rig.meterInfo(check.quantity)) return typedReading(check, sheet, await technician.reads(stepId, check));
  rig.hands?.probesOn(check.id);
  const meter = await rig.openMeterFor(check.quantity, check.unit, { energises: energisingOfCheck(check) !== 'dead' });
  const value = await meter.measure();
  return judged(check, sheet, {
    value,
    source: 'meter',
    instrument: { id: meter.id, identification: meter.identification },
    accuracy: meter.accuracyText,
    resolution: meter.resolution,
  });
}

/** A reading that was typed in. Refuses (BadInputError) figures that can't be read. */
export function typedReading(check: MeasuredCheck, sheet: Sheet, { value, accuracy, resolution, meter }: TypedReading): ReadingBody {
  parseAccuracy(accuracy);
  const digit = parseQuantity(resolution);
  if (digit <= 0) throw new BadInputError(`the resolution ${resolution} is not above 0: it is the value of the meter's last digit`);
  return judged(check, sheet, {
    value: parseQuantity(value),
    source: 'typed',
    ...(meter === undefined ? {} : { instrument: { id: meter } }),
    accuracy,
    resolution: digit,
  });
}

interface Taken extends Pick<ReadingBody, 'source' | 'instrument' | 'accuracy' | 'resolution'> {
  value: number;
}

/** The sheet judges, here as on the server: what is handed in as judgement only carries the value. */
function judged(check: MeasuredCheck, sheet: Sheet, { value, ...taken }: Taken): ReadingBody {
  const unjudged = {
    value,
    unit: check.unit,
    standardUncertainty: 0,
    coverageFactor: 2,
    expandedUncertainty: 0,
    guardBand: 0,
    conformanceProbability: 0,
    verdict: 'inconclusive',
  } as const;
  return settleReading({ checkId: check.id, title: check.title, condition: check.condition, ...taken, judgement: unjudged }, sheet);
}
