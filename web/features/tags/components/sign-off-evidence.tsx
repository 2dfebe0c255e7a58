import { Link } from 'react-router-dom';
import type { UnitPage } from '../../../../shared/api/units.js';
import { formatLimits } from '../../../../shared/measure/format-reading.js';
import { sinceOpened } from '../../../../shared/readiness/facts.js';
import { checkIdOf, isCheckEvent, standingResult, verdictOf, type CheckEvent } from '../../../../shared/readiness/standing.js';
import { CaptureSummary } from '../../../components/capture-summary.js';
import { ReadingNote, ReadingValue } from '../../../components/reading-note.js';
import { VerdictMark, VerdictWord } from '../../../components/verdict.js';
import { formatDayTime, formatMoney, plural, unitNumber } from '../../../lib/format.js';
import { paths } from '../../../paths.js';

interface Judged {
  event: CheckEvent;
  /** stands; replaced by another one since the repair; before the repair; or off a simulated rig where that does not count. */
  state: 'stands' | 'replaced' | 'no longer counts' | 'never counted';
}

/** Every result of every check since the unit was opened, none left out, with what became of it. Grouped by check, oldest first. */
function resultsByCheck(page: UnitPage, counts: (event: CheckEvent) => boolean): { title: string; results: Judged[] }[] {
  const opened = sinceOpened(page.events);
  const lastRepair = opened.findLastIndex((event) => event.kind === 'repair');
  const groups = new Map<string, { event: CheckEvent; afterRepair: boolean }[]>();
  opened.forEach((event, index) => {
    if (!isCheckEvent(event)) return;
    const key = checkIdOf(event) ?? titleOf(event);
    groups.set(key, [...(groups.get(key) ?? []), { event, afterRepair: index > lastRepair }]);
  });
  return [...groups.values()].map((results) => {
    const standing = standingResult(results.filter(({ event, afterRepair }) => afterRepair && counts(event)).map(({ event }) => event));
    return {
      title: titleOf(results[0]?.event),
      results: results.map(({ event, afterRepair }) => ({
        event,
        state: !counts(event) ? 'never counted' : !afterRepair ? 'no longer counts' : event === standing ? 'stands' : 'replaced',
      })),
    };
  });
}

const titleOf = (event: CheckEvent | undefined): string =>
  event === undefined ? '' : event.kind === 'reading' ? event.reading.title : event.inspection.title;

function ResultRow({ event, state }: Judged) {
  const void_ = state === 'no longer counts' || state === 'never counted';
  return (
    <li className="border-t border-line py-2">
      <div className="grid grid-cols-[1fr_auto] items-center gap-x-4 wide:grid-cols-[220px_1fr_150px_170px]">
        <span>
          {event.kind === 'reading' ? (
            <ReadingValue reading={event.reading} className={void_ ? 'text-ink2' : 'font-bold'} />
          ) : (
            <span className={void_ ? 'text-ink2' : 'font-bold'}>looked at</span>
          )}
        </span>
        <span className="lab order-last col-span-2 wide:order-none wide:col-span-1">
          {formatDayTime(event.at)}; {event.by.name}
          {event.kind === 'reading' &&
            `; ${event.reading.source === 'typed' ? 'typed in' : (event.reading.instrument?.id ?? 'meter')}, ${event.reading.accuracy}`}
          {event.simulated && '; simulated'}
        </span>
        <VerdictWord verdict={verdictOf(event)} />
        <span className="order-last flex items-center gap-2 wide:order-none">
          {void_ && <VerdictMark kind="void" />}
          {state}
        </span>
      </div>
      {event.kind === 'inspection' && event.inspection.note !== undefined && <p className="text-[16px]">{event.inspection.note}</p>}
      {event.kind === 'reading' && state !== 'no longer counts' && <ReadingNote reading={event.reading} />}
    </li>
  );
}

/** Everything a lead looks at before signing: each result ever taken since intake or return, what was mended, and the captures. */
export function SignOffEvidence({ page, demo, currency }: { page: UnitPage; demo: boolean; currency: string }) {
  const opened = sinceOpened(page.events);
  const groups = resultsByCheck(page, (event) => demo || !event.simulated);
  const repairs = opened.filter((event) => event.kind === 'repair');
  const captures = opened.filter((event) => event.kind === 'capture');
  const calibrations = opened.filter((event) => event.kind === 'calibration');
  const overrides = opened.filter((event) => event.kind === 'override');
  const notes = opened.filter((event) => event.kind === 'note');
  return (
    <div className="grid gap-7">
      <section aria-labelledby="results">
        <h2 id="results" className="section-heading">
          Every result since it was opened
        </h2>
        <p className="py-2 text-ink2">
          None is left out: a result that was replaced, or was taken before the last repair, stands here too.
        </p>
        {groups.length === 0 && <p>None was taken.</p>}
        {groups.map(({ title, results }) => {
          const reading = results.find(({ event }) => event.kind === 'reading')?.event;
          return (
            <section key={title} className="py-3">
              <h3 className="flex flex-wrap items-baseline gap-x-3 pb-1">
                {title}
                {reading?.kind === 'reading' && (
                  <span className="num text-[14px]! font-normal text-ink2">
                    {formatLimits(
                      reading.reading.judgement.low,
                      reading.reading.judgement.high,
                      reading.reading.judgement.unit,
                      reading.reading.resolution,
                    )}
                  </span>
                )}
              </h3>
              <ul>
                {results.map((result) => (
                  <ResultRow key={result.event.id} {...result} />
                ))}
              </ul>
            </section>
          );
        })}
        {calibrations.map((event) => (
          <div
            key={event.id}
            className="grid grid-cols-[1fr_auto] items-center gap-x-4 border-t border-line py-2 wide:grid-cols-[1fr_150px_170px]"
          >
            <span>
              <b>Calibration run</b> {event.calibration.reason}{' '}
              <span className="lab">
                {formatDayTime(event.at)}; {event.by.name}
              </span>
            </span>
            <VerdictWord verdict={event.calibration.verdict} />
          </div>
        ))}
      </section>
      <section aria-labelledby="mended">
        <h2 id="mended" className="section-heading">
          What was mended
        </h2>
        {repairs.length === 0 && <p className="py-2">Nothing since it was opened.</p>}
        <ul>
          {repairs.map((event) => (
            <li key={event.id} className="border-b border-line py-2">
              <b>{event.repair.part}</b>
              {event.repair.partSource.kind === 'used' && (
                <>
                  , a used part from{' '}
                  <Link to={paths.unit(event.repair.partSource.fromUnit)}>No. {unitNumber(event.repair.partSource.fromUnit)}</Link>
                </>
              )}
              {event.repair.partSource.kind === 'new' && ', a new part'}, {event.repair.minutes} min,{' '}
              {formatMoney(event.repair.costMinor, currency)}.{' '}
              <span className="lab">
                {formatDayTime(event.at)}; {event.by.name}
              </span>
              {event.repair.note !== undefined && <p className="text-[16px]">{event.repair.note}</p>}
            </li>
          ))}
        </ul>
      </section>
      {overrides.length > 0 && (
        <section aria-labelledby="overrides">
          <h2 id="overrides" className="section-heading">
            Gates opened in spite of what was missing
          </h2>
          {overrides.map((event) => (
            <p key={event.id} className="border-b border-line py-2">
              “{event.reason}”{' '}
              <span className="lab">
                {formatDayTime(event.at)}; {event.by.name}
              </span>
            </p>
          ))}
        </section>
      )}
      {notes.length > 0 && (
        <section aria-labelledby="notes">
          <h2 id="notes" className="section-heading">
            What was noted
          </h2>
          {notes.map((event) => (
            <p key={event.id} className="border-b border-line py-2">
              {event.text}{' '}
              <span className="lab">
                {formatDayTime(event.at)}; {event.by.name}
              </span>
            </p>
          ))}
        </section>
      )}
      <section aria-labelledby="captures">
        <h2 id="captures" className="section-heading">
          The lamps
        </h2>
        {captures.length === 0 && <p className="py-2">Not captured.</p>}
        {captures.map((event) => (
          <article key={event.id} className="border-b border-line py-3">
            <h3 className="mb-2 flex flex-wrap items-baseline gap-x-4">
              {formatDayTime(event.at)}, {plural(Math.floor(event.capture.answer.durationS), 'second')}
              <Link className="font-normal" to={paths.capture(event.capture.captureId)}>
                Strip chart
              </Link>
            </h3>
            <CaptureSummary answer={event.capture.answer} faces={page.faces} />
          </article>
        ))}
      </section>
    </div>
  );
}
