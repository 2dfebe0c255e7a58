import { PageHeading } from '../components/page-heading.js';
import { Pending } from '../components/page-states.js';
import { useLive } from '../features/live/api/hear-live.js';
import { LiveBench } from '../features/live/components/live-bench.js';
import { LiveConnection } from '../features/live/components/live-connection.js';
import { benchesOf } from '../features/live/live-state.js';

const nothingToFetch = (): void => undefined;

/** What goes on at each bench, for the wall and for the lead's desk. */
export function BoardPage() {
  const live = useLive(undefined, nothingToFetch);
  const benches = benchesOf(live.works);
  return (
    <>
      <PageHeading title="Benches" />
      <LiveConnection up={live.up} />
      {benches.length === 0 &&
        (live.up ? (
          <p className="py-6">Nothing goes on at any bench. A run, a capture or a reading shows here as soon as it begins.</p>
        ) : (
          <Pending what="what goes on" />
        ))}
      <ul className="live-benches">
        {benches.map((work) => (
          <LiveBench key={work.bench} work={work} />
        ))}
      </ul>
    </>
  );
}
