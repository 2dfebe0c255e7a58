import './steps-table.css';
import { Fragment, type ReactNode } from 'react';
import type { Verdict } from '../../shared/verdict.js';
import { VerdictWord } from './verdict.js';

export interface StepLine {
  id: string;
  kind: string;
  title: ReactNode;
  value?: ReactNode;
  verdict?: Verdict | undefined;
  /** What a step that judges nothing came to: "confirmed", "done". */
  said?: string | undefined;
  /** Stands under the line. */
  note?: ReactNode;
}

/** The steps of a bench run, a line each; verdicts stand in one column, and what needs a decision is tinted. */
export function StepsTable({ lines, caption }: { lines: readonly StepLine[]; caption: string }) {
  return (
    <table className="steps-table">
      <caption className="sr-only">{caption}</caption>
      <thead className="sr-only">
        <tr>
          {['step', 'kind', 'what', 'reading', 'verdict'].map((head) => (
            <th key={head} scope="col">
              {head}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {lines.map((line, index) => (
          <Fragment key={line.id}>
            <tr className={line.verdict === 'inconclusive' ? 'is-open' : ''}>
              <td>{index + 1}</td>
              <td>{line.kind}</td>
              <td>{line.title}</td>
              <td>{line.value}</td>
              <td>
                {line.verdict === undefined ? (
                  <span className="text-ink2 wide:pl-[25px]">{line.said}</span>
                ) : (
                  <VerdictWord verdict={line.verdict} />
                )}
              </td>
            </tr>
            {line.note !== undefined && (
              <tr className="steps-note">
                <td colSpan={5}>{line.note}</td>
              </tr>
            )}
          </Fragment>
        ))}
      </tbody>
    </table>
  );
}
