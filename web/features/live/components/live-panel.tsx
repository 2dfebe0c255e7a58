import './live.css';
import { useEffect, useLayoutEffect, useRef, useState } from 'react';
import { useLiveWorks, type Live } from '../api/hear-live.js';
import type { LiveWork } from '../live-state.js';
import { useIsDown } from './live-connection.js';
import { LiveWorkView, whatGoesOn } from './live-work.js';

/** As high as it has ever been: what stands below is being read, and stays where it is. */
function Steady({ works }: { works: readonly LiveWork[] }) {
  const ref = useRef<HTMLDivElement>(null);
  const [least, setLeast] = useState(0);
  const height = useRef(0);
  useLayoutEffect(() => {
    height.current = Math.max(height.current, ref.current?.offsetHeight ?? 0);
    if (height.current > least) setLeast(height.current);
  });
  return (
    <div ref={ref} style={{ minHeight: least }}>
      {works.map((work) => (
        <LiveWorkView key={work.id} work={work} />
      ))}
    </div>
  );
}

/**
 * On a unit's page: the bench's work on it while it goes on, and how it ended. Its line is always there, so that nothing moves when work
 * begins; the work itself is shown at once where it goes on when the page is opened, otherwise when it is asked for.
 * `meanwhile`: what the page does while the connection is away.
 */
export function LivePanel({ live, meanwhile }: { live: Live; meanwhile: string }) {
  const works = [...useLiveWorks(live).values()].sort((a, b) => Date.parse(b.heardAt) - Date.parse(a.heardAt));
  const going = works.filter(({ ended }) => !ended);
  const shown = going.length > 0 ? going : works.slice(0, 1);
  const [open, setOpen] = useState<boolean>();
  const { up } = live;
  const goesOn = going.length > 0;
  useEffect(() => {
    if (up) setOpen((before) => before ?? goesOn);
  }, [up, goesOn]);
  const down = useIsDown(up);
  const heading = goesOn ? 'Going on now' : shown.length > 0 ? 'Just ended' : 'At no bench now';
  return (
    <section aria-labelledby="live" className="mt-6">
      <div className="live-line">
        <h2 id="live" className="font-bold">
          {shown.length === 0 && !up ? 'At the bench' : heading}
        </h2>
        <p role="status" className="min-w-0 flex-1 truncate text-ink2">
          {down ? `The live connection is interrupted. ${meanwhile}` : !open && shown[0] ? whatGoesOn(shown[0]) : ''}
        </p>
        {shown.length > 0 && (
          <button
            type="button"
            className="min-h-11 cursor-pointer px-1 underline underline-offset-4"
            aria-expanded={open === true}
            onClick={() => setOpen(open !== true)}
          >
            {open === true ? 'Hide' : 'Show'} <span className="sr-only">the bench’s work</span>
          </button>
        )}
      </div>
      {open === true && shown.length > 0 && <Steady works={shown} />}
    </section>
  );
}
