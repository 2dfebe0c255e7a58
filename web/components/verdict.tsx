import type { ReactNode } from 'react';
import type { Verdict } from '../../shared/verdict.js';

export type MarkKind = 'pass' | 'fail' | 'inconclusive' | 'missing' | 'void';

/** The shapes, in a box of 20 by 20: they differ without colour. */
const SHAPES: Record<MarkKind, ReactNode> = {
  pass: <path fill="currentColor" d="M1 1H19V1.4L8.6 11.6 5.4 8.4 3.2 10.6 8.6 16 19 5.8V19H1z" />,
  fail: <path fill="currentColor" d="M4 .8 10 6.8 16 .8 19.2 4 13.2 10 19.2 16 16 19.2 10 13.2 4 19.2.8 16 6.8 10 .8 4z" />,
  inconclusive: <path fill="currentColor" d="M1 4h8V0h2v4h8v12h-8v4H9v-4H1zM11 6v8h6V6z" />,
  missing: <path fill="none" stroke="currentColor" strokeWidth="3" d="M0 17h5M7.5 17h5M15 17h5" />,
  void: <path fill="none" stroke="currentColor" strokeWidth="2" d="M3 3h14v14H3zM0 20 20 0" />,
};

/** A verdict's mark alone: only where a rule's own name is the word; `label` is for the screen reader. */
export function VerdictMark({ kind, label }: { kind: MarkKind; label?: string }) {
  return (
    <svg
      className={`verdict-mark is-${kind}`}
      viewBox="0 0 20 20"
      {...(label === undefined ? { 'aria-hidden': true } : { role: 'img', 'aria-label': label })}
    >
      {SHAPES[kind]}
    </svg>
  );
}

const KIND_OF: Record<Verdict, MarkKind> = { pass: 'pass', fail: 'fail', inconclusive: 'inconclusive', 'not done': 'missing' };

/** A verdict: mark, word and colour. */
export function VerdictWord({ verdict }: { verdict: Verdict }) {
  const kind = KIND_OF[verdict];
  return (
    <span className={`verdict is-${kind}`}>
      <VerdictMark kind={kind} />
      {verdict}
    </span>
  );
}

/** What shapes share by id: the one hatch of the product, which means "can't be told". Stands once on a page. */
export function MarkDefinitions() {
  return (
    <svg aria-hidden="true" className="absolute h-0 w-0">
      <defs>
        <pattern id="hatch" width="4" height="4" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">
          <path d="M0 0v4" stroke="var(--ink2)" strokeWidth="2.2" />
        </pattern>
      </defs>
    </svg>
  );
}
