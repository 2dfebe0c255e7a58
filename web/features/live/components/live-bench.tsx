import './live.css';
import { Link } from 'react-router-dom';
import { unitNumber } from '../../../lib/format.js';
import { paths } from '../../../paths.js';
import type { LiveWork } from '../live-state.js';
import { LiveWorkView } from './live-work.js';

/** A bench with what stands on it. */
export function LiveBench({ work }: { work: LiveWork }) {
  return (
    <li className="live-bench">
      <div className="live-bench-top">
        <p className="flex items-baseline gap-3">
          <Link className="tap live-bench-number" to={paths.unit(work.unit)}>
            <span className="sr-only">Unit </span>
            {unitNumber(work.unit)}
          </Link>
          <span className="min-w-0">{work.began.machine}</span>
        </p>
        <LiveWorkView work={work} />
      </div>
      <div className="live-bench-legs">
        <h2>{work.bench}</h2>
      </div>
    </li>
  );
}
