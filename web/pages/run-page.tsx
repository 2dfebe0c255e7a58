import { useQuery } from '@tanstack/react-query';
import { Link, useParams } from 'react-router-dom';
import { PageHeading } from '../components/page-heading.js';
import { Fetched } from '../components/page-states.js';
import { VerdictWord } from '../components/verdict.js';
import { runQuery } from '../features/runs/api/get-run.js';
import { RunLogTable } from '../features/runs/components/run-log.js';
import { formatDayTime, formatDuration, plural, unitNumber } from '../lib/format.js';
import { paths } from '../paths.js';

export function RunPage() {
  const { id = '' } = useParams();
  const run = useQuery(runQuery(id));
  return (
    <Fetched query={run} what="the bench log">
      {(page) => (
        <>
          <div className="mb-1 flex flex-wrap items-baseline gap-x-6 gap-y-1">
            <PageHeading title={`Bench log ${page.script.name}`} />
            <span className="text-[21px]">
              <VerdictWord verdict={page.verdict} />
            </span>
          </div>
          <p className="mb-1">
            {page.script.title}, on{' '}
            <Link to={paths.unit(page.unit.number)}>
              No. {unitNumber(page.unit.number)}, {page.unit.maker} {page.unit.model}
            </Link>
            {page.script.prove ? '. A proof run.' : '.'}
          </p>
          <p className="lab mb-4 text-[14px]!">
            {[
              formatDayTime(page.startedAt),
              page.by.name,
              `rig ${page.rig.name}${page.rig.simulated ? ', simulated' : ''}`,
              formatDuration(page.startedAt, page.endedAt),
              plural(page.steps.length, 'step'),
            ].join('; ')}
          </p>
          {page.rig.simulated && (
            <p className="mb-3">The instruments were simulated: these results count in the demo shop only, and its tags print SAMPLE.</p>
          )}
          {page.interrupted && <p className="mb-3 font-bold">The run was stopped before its last step.</p>}
          {page.damages?.map(({ line, reason, found }) => (
            <p key={line} className="mb-3 font-bold">
              Line {line} of the bench’s journal was damaged: {reason}. What stood behind it was not taken for done;{' '}
              {plural(found.length, 'step result')} of it kept as evidence.
            </p>
          ))}
          <div className="border-t-2 border-ink">
            {page.steps.length === 0 ? <p className="py-4">The run was stopped before its first step.</p> : <RunLogTable page={page} />}
          </div>
          <details className="mt-4">
            <summary className="flex min-h-11 cursor-pointer items-center text-rim underline">The script as it was run</summary>
            <pre className="overflow-x-auto bg-frit p-4 font-mono text-[14px]" tabIndex={0}>
              {page.script.text}
            </pre>
          </details>
        </>
      )}
    </Fetched>
  );
}
