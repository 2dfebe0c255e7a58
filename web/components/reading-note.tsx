import type { ReadingBody } from '../../shared/history/events.js';
import { decimalsOf, formatReading, formatSpread } from '../../shared/measure/format-reading.js';

/** A figure more than the meter shows, so that the sum can be followed. */
const standardText = (value: number): string => String(Number(value.toPrecision(3)));

/** How far a value lies inside its limits; negative: outside. */
function inside(reading: ReadingBody): number {
  const { value, low = -Infinity, high = Infinity } = reading.judgement;
  return Math.min(value - low, high - value);
}

/** Readings that keep people safe when the machine is on mains: they get an instruction, never a probability. */
const isSafety = (reading: ReadingBody): boolean => reading.deadTest !== undefined || reading.condition === 'energised';

/** Why a reading that is close to its limit is inconclusive, and what settles it. Nothing for other readings. */
export function ReadingNote({ reading }: { reading: ReadingBody }) {
  const { judgement, resolution } = reading;
  if (judgement.verdict !== 'inconclusive') return null;
  const by = inside(reading);
  const unit = judgement.unit;
  const distance = formatReading(Math.abs(by), decimalsOf(resolution) === undefined ? 0 : resolution, unit);
  const { coverageFactor, standardUncertainty, expandedUncertainty } = judgement;
  return (
    <p className="bg-unsure-ground px-3 py-2 text-[16px]">
      <span className="num">{formatReading(judgement.value, resolution, unit)}</span> is {by >= 0 ? 'inside' : 'outside'} by{' '}
      <span className="num">{distance}</span>, no more than U = {coverageFactor}u ={' '}
      <span className="num">
        {coverageFactor} × {standardText(standardUncertainty)} = {formatSpread(expandedUncertainty, resolution, unit).slice(1)}
      </span>
      .{' '}
      {isSafety(reading)
        ? 'Too close for this meter: measure again with one of smaller uncertainty before the machine goes further.'
        : `${Math.round(judgement.conformanceProbability * 100)} of 100 such readings would be inside. A meter of smaller uncertainty can decide.`}
    </p>
  );
}

/** Value and spread of a reading, as they stand in a column. */
export function ReadingValue({ reading, className = '' }: { reading: ReadingBody; className?: string }) {
  const { judgement, resolution } = reading;
  return (
    <span className={`num ${className}`}>
      {formatReading(judgement.value, resolution, judgement.unit)} {formatSpread(judgement.expandedUncertainty, resolution)}
    </span>
  );
}
