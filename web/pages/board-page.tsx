import { ErrorNote, Pending } from '../components/page-states.js';
import { PageHeading } from '../components/page-heading.js';
import { useLive, useLiveWorks } from '../features/live/api/hear-live.js';
import { LiveBench } from '../features/live/components/live-bench.js';
import { useIsDown } from '../features/live/components/live-connection.js';
import { useNowMs } from '../features/live/components/live-work.js';
import { benchesOf } from '../features/live/live-state.js';
import { UnreachableError } from '../lib/api-problem.js';

const nothingToFetch = (): void => undefined;
const INTERRUPTED = new UnreachableError('The live connection is interrupted.');

/** What goes on at each bench, for the wall and for the lead's desk. */
export function BoardPage() {
  const live = useLive(undefined, nothingToFetch);
  const down = useIsDown(live.up);
  const benches = benchesOf(useLiveWorks(live), useNowMs());
  return (
    <>
      <PageHeading title="Going on" />
      {down && (
        <ErrorNote error={INTERRUPTED} retry={live.retry}>
          {benches.length > 0 && <p>What stands here is as it was heard last. It comes back by itself, too.</p>}
        </ErrorNote>
      )}
      {benches.length === 0 && live.up && (
        <p className="py-6">Nothing goes on at any bench. A run, a capture or a reading shows here as soon as it begins.</p>
      )}
      {benches.length === 0 && !live.up && !down && <Pending what="what goes on" />}
      <ul className="live-benches">
        {benches.map((work) => (
          <LiveBench key={work.id} work={work} />
        ))}
      </ul>
    </>
  );
}
