import type { DecodeAnswer, Segment } from '../../../../shared/decode/answer.js';
import type { Capture } from '../../../../shared/lamps/capture.js';

interface Row {
  fromS: number;
  toS: number | undefined;
  what: string;
  more: string;
}

function rowOf(segment: Segment): Row {
  const { fromS, toS } = segment;
  switch (segment.kind) {
    case 'ready':
      return { fromS, toS, what: 'ready blink', more: 'service mode on' };
    case 'dark':
      return { fromS, toS, what: 'dark', more: '' };
    case 'code':
      return {
        fromS,
        toS,
        what: `code ${segment.code}`,
        more: [segment.repeats === undefined ? '' : `${segment.repeats} times`, `confidence ${segment.confidence.toFixed(4)}`]
          .filter(Boolean)
          .join(', '),
      };
    case 'unreadable':
      return { fromS, toS, what: 'unreadable', more: segment.reason };
  }
}

/** What the chart shows, for who reads better than looks. */
export function CaptureTable({ answer, capture }: { answer: DecodeAnswer; capture: Capture }) {
  const rows: Row[] = [
    ...answer.segments.map(rowOf),
    ...capture.marks.map(({ atUs, label }) => ({
      fromS: atUs / 1e6,
      toS: undefined,
      what: `mark ${label}`,
      more: label === 'next' ? 'the next code was brought up' : '',
    })),
    ...capture.gaps.map(({ atUs, lost }) => ({ fromS: atUs / 1e6, toS: undefined, what: 'lost', more: `${lost} probe lines` })),
  ].sort((a, b) => a.fromS - b.fromS);
  return (
    <details className="mt-4">
      <summary className="flex min-h-11 cursor-pointer items-center text-rim underline">The chart as a table</summary>
      <div className="overflow-x-auto" tabIndex={0} role="region" aria-label="The chart as a table">
        <table className="w-full max-w-[800px] border-collapse">
          <thead>
            <tr>
              {['from, s', 'to, s', 'what', ''].map((head) => (
                <th key={head} scope="col" className="py-1.5 pr-5">
                  {head || <span className="sr-only">more</span>}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {rows.map((row, index) => (
              <tr key={index} className="border-t border-line">
                <td className="num py-1.5 pr-5 text-right">{row.fromS.toFixed(1)}</td>
                <td className="num py-1.5 pr-5 text-right">{row.toS?.toFixed(1)}</td>
                <td className="py-1.5 pr-5">{row.what}</td>
                <td className="py-1.5">{row.more}</td>
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </details>
  );
}
