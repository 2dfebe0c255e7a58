import { LIVE_TEXT_LENGTH, type LiveMessageOf, type LiveStep } from '../../shared/api/live.js';
import { lampFace } from '../../shared/lamps/face.js';
import { formatLimits, formatReading, formatSpread } from '../../shared/measure/format-reading.js';
import type { ReadingBody } from '../../shared/history/events.js';
import type { StepResult } from '../../shared/script/run-log.js';
import type { Step } from '../../shared/script/schema.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Understanding } from '../bench/live-view.js';
import { repairText } from '../render/repair-text.js';

/** What the server refuses in a text: a NUL, or half of a pair that stands for one character. */
const NO_TEXT = /[\0\p{Surrogate}]/gu;

/** At most so long, as the server counts; no character is cut in two, and what is no text is marked as such. */
export function shortened(text: string, most = LIVE_TEXT_LENGTH): string {
  const clean = text.replace(NO_TEXT, '\uFFFD');
  return clean.length <= most ? clean : `${clean.slice(0, most - 1).replace(/\p{Surrogate}$/u, '')}…`;
}
const NAME_LENGTH = 100;
export const shortName = (text: string): string => shortened(text, NAME_LENGTH);

export const stepOf = ({ id, kind, title }: Pick<Step, 'id' | 'kind' | 'title'>): LiveStep => ({
  id: shortName(id),
  kind,
  title: shortened(title),
});

export function readingTold({ judgement, resolution }: ReadingBody): string {
  const { value, unit, low, high, expandedUncertainty } = judgement;
  const limits = formatLimits(low, high, unit, resolution);
  return `${formatReading(value, resolution, unit)} ${formatSpread(expandedUncertainty, resolution)}${limits === '' ? '' : `, ${limits}`}`;
}

/** What a step came to, in words. */
export function stepTold(result: StepResult): string {
  switch (result.kind) {
    case 'measure':
      return readingTold(result.reading);
    case 'inspect':
      return result.inspection.note ?? '';
    case 'expect':
      return result.seen;
    case 'watch':
      return result.watched.reason;
    case 'skipped':
      return result.reason;
    case 'caution':
      return result.answer === 'yes' ? 'confirmed' : 'answered with no';
    case 'instruct':
      return result.answer;
    case 'repair':
      return repairText(result.repair);
    case 'note':
      return result.text;
    case 'capture':
      return 'recorded';
    case 'clear':
      return 'cleared';
    case 'cut':
      return 'broken off; what came is kept';
  }
}

/** What the decoder makes of a capture so far. The face is that of the last code, also while the ready blink or the dark shows. */
export function codeSoFar(understood: Understanding, sheet: Sheet, scaleMax: number): LiveMessageOf<'code so far'> {
  const last = understood.segments.at(-1);
  const told = understood.segments.findLast((segment) => segment.kind === 'code' || segment.kind === 'unreadable');
  const thresholds = understood.lamps.map(({ threshold }) => (threshold === null ? null : Math.round((1000 * threshold) / scaleMax) / 10));
  const shown = { kind: 'code so far', shows: last?.kind ?? 'nothing', thresholds } as const;
  if (told?.kind === 'unreadable') return { ...shown, reason: shortened(told.reason) };
  if (told?.kind !== 'code') return shown;
  const face = lampFace(told.code, sheet);
  const title = sheet.faults.find(({ code }) => code === told.code)?.title;
  return {
    ...shown,
    code: shortName(told.code),
    confidence: told.confidence,
    ...(told.repeats === undefined ? {} : { repeats: told.repeats }),
    ...(title === undefined ? {} : { title: shortened(title) }),
    ...(face === undefined ? {} : { face }),
  };
}
