import type { ReadingBody, UnitEvent } from '../../../../shared/history/events.js';
import { formatLimits } from '../../../../shared/measure/format-reading.js';
import { MeterScale } from '../../../components/meter-scale.js';
import { ReadingValue } from '../../../components/reading-note.js';
import { VerdictWord } from '../../../components/verdict.js';
import { formatDate } from '../../../lib/format.js';
import { beforeAfterRows } from './before-after-rows.js';

function Side({ reading, old = false }: { reading: ReadingBody | undefined; old?: boolean }) {
  if (!reading) return <span className="lab">not measured</span>;
  return (
    <>
      <ReadingValue reading={reading} className={old ? 'text-ink2' : ''} />
      <br />
      <VerdictWord verdict={reading.judgement.verdict} />
    </>
  );
}

const limitsOf = ({ judgement, resolution }: ReadingBody): string =>
  formatLimits(judgement.low, judgement.high, judgement.unit, resolution);

/** Each check's standing readings against its limits, those before the last repair beside those after it. */
export function BeforeAfter({ counting }: { counting: readonly UnitEvent[] }) {
  const { repair, rows } = beforeAfterRows(counting);
  if (rows.length === 0) return null;
  return (
    <section aria-labelledby="before-after">
      <h2 id="before-after" className="section-heading">
        {repair ? `Before and after: ${repair.repair.part}` : 'Readings against their limits'}
      </h2>
      <p className="flex flex-wrap gap-x-5 gap-y-0.5 py-2 text-[15px] text-ink2">
        {repair && (
          <span>
            <svg width="16" height="14" aria-hidden="true" className="mr-1.5 inline-block">
              <path d="M8 13 1 1h14z" fill="none" stroke="currentColor" strokeWidth="1.75" />
            </svg>
            before {formatDate(repair.at)}; no longer counts
          </span>
        )}
        <span>
          <svg width="16" height="14" aria-hidden="true" className="mr-1.5 inline-block">
            <path d="M8 1 1 13h14z" fill="currentColor" />
          </svg>
          {repair ? 'after' : 'reading'}
        </span>
        <span>
          <svg width="12" height="14" aria-hidden="true" className="mr-1.5 inline-block">
            <path d="M0 0h12v14H0z" fill="url(#hatch)" />
          </svg>
          guard band
        </span>
      </p>
      <ul>
        {rows.map(({ checkId, title, before, after }) => {
          const judged = after ?? before;
          return (
            <li key={checkId} className="border-b border-line py-2.5">
              <h3 className="flex flex-wrap items-baseline justify-between gap-x-2.5">
                {title} <span className="num text-[14px]! font-normal text-ink2">{judged && limitsOf(judged)}</span>
              </h3>
              <MeterScale title={title} before={before} after={after} />
              <div className="grid grid-cols-2">
                <p>{repair && <Side reading={before} old />}</p>
                <p className="text-right">
                  <Side reading={after} />
                </p>
              </div>
            </li>
          );
        })}
      </ul>
    </section>
  );
}
