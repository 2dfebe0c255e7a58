import './hanging-tag.css';
import type { ReactNode } from 'react';
import type { UnitPage } from '../../../../shared/api/units.js';
import type { RuleResult } from '../../../../shared/readiness/readiness.js';
import { VerdictMark, type MarkKind } from '../../../components/verdict.js';

const MARKS: Record<RuleResult['state'], { kind: MarkKind; label: string }> = {
  met: { kind: 'pass', label: 'met' },
  missing: { kind: 'missing', label: 'missing' },
  fail: { kind: 'fail', label: 'fail' },
  inconclusive: { kind: 'inconclusive', label: 'inconclusive' },
};

function Rule({ rule, action }: { rule: RuleResult; action: ReactNode }) {
  const { kind, label } = MARKS[rule.state];
  const met = rule.state === 'met';
  return (
    <li className={met ? '' : 'rule-to-get'}>
      <div className="tag-rule">
        <VerdictMark kind={kind} label={label} />
        {met ? <span>{rule.title}</span> : <b>{rule.title}</b>}
        <span className="evidence">{rule.evidence}</span>
      </div>
      {!met && (rule.how !== undefined || action) && (
        <div className="rule-way">
          <p>{rule.how}</p>
          {action}
        </div>
      )}
    </li>
  );
}

export interface HangingTagProps {
  page: UnitPage;
  heading: ReactNode;
  /** What to press for a rule that is not met, where this page can do something about it. */
  actionFor: (rule: RuleResult) => ReactNode;
  complaint: ReactNode;
}

/** The unit's standing: a tag that is blank where something is missing, with the way to get it on the same line. */
export function HangingTag({ page, heading, actionFor, complaint }: HangingTagProps) {
  const { unit, readiness, tag, stage } = page;
  const rules = [...readiness.rules.filter((rule) => rule.state === 'met'), ...readiness.rules.filter((rule) => rule.state !== 'met')];
  const stands = tag?.standing === 'stands';
  return (
    <section className="hanging-tag" aria-label="Standing">
      <div className="paper-tag paper-tag-lying" aria-hidden="true">
        <span className="tag-hole" />
        <svg className="string" viewBox="0 0 84 120">
          <path d="M81 60C60 44 30 50 0 22M81 60C60 74 34 62 0 40" />
        </svg>
      </div>
      <div className="tag-top">
        {heading}
        <span className="tag-stage">{stage}</span>
        <p>
          {unit.plate.maker} {unit.plate.model}, {unit.appliance}. {stands ? 'Ready' : 'Not ready'}:{' '}
          <b>
            {readiness.met} of {readiness.total}
          </b>{' '}
          rules met.
          {tag && (stands ? ` Tag ${tag.number} stands.` : ` Tag ${tag.number} was withdrawn.`)}
        </p>
      </div>
      <div className="complaint">{complaint}</div>
      <ol className="tag-rules" aria-label="Readiness rules">
        {rules.map((rule) => (
          <Rule key={rule.id} rule={rule} action={actionFor(rule)} />
        ))}
      </ol>
    </section>
  );
}
