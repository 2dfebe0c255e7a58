import { BadInputError } from '../errors.js';
import { judge } from '../measure/judge.js';
import { parseAccuracy } from '../measure/parse-accuracy.js';
import { readingUncertainty } from '../measure/uncertainty.js';
import { checkOf, energisingOfCheck } from '../script/energised.js';
import type { MeasuredCheck, Sheet } from '../sheet/schema.js';
import type { InspectionBody, ReadingBody } from './events.js';

/** No bench meter shows more than 8½ digits (common practice, no published source): a finer resolution is a slip, or a way round the guard band. */
const FINEST_SHARE_OF_VALUE = 1e-9;

/** A display that shows whole digits is off by half of one at least, whatever its data sheet says (quantisation; JCGM 100, F.2.2.1). */
const LEAST_HALF_WIDTH_DIGITS = 0.5;

/** What cannot be below zero by more than the meter's error: such a reading has its leads or its mode wrong. */
const NEVER_NEGATIVE: readonly MeasuredCheck['quantity'][] = [
  'resistance',
  'insulation resistance',
  'voltage ac',
  'current ac',
  'capacitance',
];

/**
 * A reading judged by the sheet's own limits, whatever limits it came with.
 *
 * Takes what was measured and by what; the check's title, limits, condition and place in the dead tests come from the sheet,
 * and the coverage factor is the shop's (2), never the sender's: a small one would turn inconclusive into pass.
 * Refuses (BadInputError) a check the sheet does not measure, a value that is no reading, a negative value of a quantity that has none,
 * and a meter that claims less uncertainty than its display has.
 *
 * @example settleReading({ checkId: 'heater', judgement: { value: 40, … }, … }, heron).judgement.verdict // 'fail'
 */
export function settleReading(reading: ReadingBody, sheet: Sheet): ReadingBody {
  const check = checkOf(sheet, reading.checkId);
  if (check?.kind !== 'measure') throw new BadInputError(`the sheet has no measured check '${reading.checkId}'`);
  const { deadTest: _told, undischarged, ...rest } = reading;
  const { value } = reading.judgement;
  const { resolution } = reading;
  const accuracy = parseAccuracy(reading.accuracy);
  const judgement = judge({ value, unit: check.unit, low: check.low, high: check.high, accuracy, resolution });

  const largest = Math.max(Math.abs(value), Math.abs(check.low ?? 0), Math.abs(check.high ?? 0));
  if (resolution < largest * FINEST_SHARE_OF_VALUE) {
    throw new BadInputError(`no meter resolves ${resolution} ${check.unit} here: give the value of its last digit`);
  }
  if (readingUncertainty(value, accuracy, resolution).halfWidth < LEAST_HALF_WIDTH_DIGITS * resolution) {
    throw new BadInputError('no meter is without uncertainty: give its accuracy as its data sheet has it');
  }
  if (NEVER_NEGATIVE.includes(check.quantity) && value < -judgement.expandedUncertainty) {
    throw new BadInputError(`${check.quantity} can't be ${value} ${check.unit}: look at the leads and at the meter's mode`);
  }
  return {
    ...rest,
    title: check.title,
    condition: check.condition,
    ...(check.deadTest === undefined ? {} : { deadTest: check.deadTest }),
    judgement,
    ...(undischarged === true && energisingOfCheck(check) === 'test voltage' ? { undischarged } : {}),
  };
}

/** An inspection with its title and its place in the dead tests from the sheet, where the sheet knows it. */
export function settleInspection(inspection: InspectionBody, sheet: Sheet | undefined): InspectionBody {
  const { deadTest: _told, ...rest } = inspection;
  const check = sheet && checkOf(sheet, inspection.checkId);
  if (inspection.checkId !== undefined && check?.kind !== 'inspect')
    throw new BadInputError(`the sheet has no inspection '${inspection.checkId}'`);
  return { ...rest, title: check?.title ?? inspection.title, ...(check?.deadTest === undefined ? {} : { deadTest: check.deadTest }) };
}
