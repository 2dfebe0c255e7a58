import './live.css';
import type { LiveView } from '../live-source.js';
import { LiveConnection } from './live-connection.js';
import { LiveWorkView } from './live-work.js';

/** On a unit's page: the bench's work on it while it goes on, and how it ended. Nothing where nothing goes on. */
export function LivePanel({ live }: { live: LiveView }) {
  const works = [...live.works.values()].sort((a, b) => Date.parse(b.heardAt) - Date.parse(a.heardAt));
  const going = works.filter(({ ended }) => !ended);
  const shown = going.length > 0 ? going : works.slice(0, 1);
  return (
    <>
      <LiveConnection up={live.up} />
      {shown.length > 0 && (
        <section aria-labelledby="live" className="mt-6">
          <h2 id="live" className="section-heading">
            {going.length > 0 ? 'Going on now' : 'Just ended'}
          </h2>
          {shown.map((work) => (
            <LiveWorkView key={work.id} work={work} />
          ))}
        </section>
      )}
    </>
  );
}
