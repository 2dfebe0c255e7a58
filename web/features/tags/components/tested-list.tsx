import type { TagContent } from '../../../../shared/api/tags.js';
import { VerdictWord } from '../../../components/verdict.js';

/** What was tested, as the buyer reads it: title, reading and limit, verdict. */
export function TestedList({ tested }: { tested: TagContent['tested'] }) {
  return (
    <ul>
      {tested.map((test) => (
        <li key={test.title} className="grid grid-cols-[1fr_auto] items-center gap-x-2.5 border-b border-line py-2">
          <span>
            {test.title}
            <span className="lab block text-[14px]!">
              {test.lamps
                ? `lamps watched for ${test.reading}, ${test.limit}`
                : `${[test.reading, test.spread].filter(Boolean).join(' ')}, ${test.limit}`}
            </span>
          </span>
          <VerdictWord verdict={test.verdict} />
        </li>
      ))}
    </ul>
  );
}
