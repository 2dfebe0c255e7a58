import { useState } from 'react';
import { useQuery } from '@tanstack/react-query';
import { Link, useNavigate } from 'react-router-dom';
import { mayDo } from '../../shared/api/roles.js';
import type { UnitPage } from '../../shared/api/units.js';
import { handsOn, type RuleResult } from '../../shared/readiness/readiness.js';
import { PageHeading } from '../components/page-heading.js';
import { ErrorNote, Fetched } from '../components/page-states.js';
import { VerdictMark, type MarkKind } from '../components/verdict.js';
import { useSignOff } from '../features/tags/api/sign-off.js';
import { SignOffEvidence } from '../features/tags/components/sign-off-evidence.js';
import { unitQuery } from '../features/units/api/get-unit.js';
import { ApiProblem } from '../lib/api-problem.js';
import { unitNumber } from '../lib/format.js';
import { useSignedIn } from '../lib/signed-in.js';
import { useUnitNumber } from '../lib/unit-number.js';
import { paths } from '../paths.js';
import { NotFoundPage } from './not-found-page.js';

const MARK_OF: Record<RuleResult['state'], MarkKind> = { met: 'pass', missing: 'missing', fail: 'fail', inconclusive: 'inconclusive' };

export function SignOffPage() {
  const number = useUnitNumber();
  return number === undefined ? <NotFoundPage /> : <SignOff number={number} />;
}

function SignOff({ number }: { number: number }) {
  const unit = useQuery(unitQuery(number));
  return (
    <Fetched query={unit} what={`unit ${unitNumber(number)}`}>
      {(page) => <SignOffInFull page={page} />}
    </Fetched>
  );
}

/** Why this person cannot sign now; undefined when nothing is in the way. */
function obstacle(
  page: UnitPage,
  user: { id: string; role: 'technician' | 'lead' | 'sales' | 'admin' },
  fourEyes: boolean,
): string | undefined {
  if (page.tag?.standing === 'stands') return `Tag ${page.tag.number} stands already.`;
  if (!mayDo(user.role, 'unit.sign-off')) return `A lead signs off. You are signed in as ${user.role}.`;
  if (!page.readiness.readyToSign) return 'Not every rule is met yet. What is missing stands above, with the way to get it.';
  const hands = handsOn(page.events);
  if (fourEyes && hands.some((person) => person.id === user.id)) {
    return 'You worked on this unit yourself. Four eyes: another lead, whose hands were not on it since it was opened, looks at your work and signs.';
  }
  return undefined;
}

function SignOffInFull({ page }: { page: UnitPage }) {
  const { user, shop } = useSignedIn();
  const navigate = useNavigate();
  const number = page.unit.number;
  const signOff = useSignOff(number);
  const [sent, setSent] = useState<readonly RuleResult[]>([]);
  const { rules } = page.readiness;
  const hindered = obstacle(page, user, shop.fourEyes);
  const hands = handsOn(page.events).map((person) => person.name);
  const conflict = signOff.error instanceof ApiProblem && signOff.error.status === 409;
  const changed = conflict ? rules.filter((rule) => sent.find(({ id }) => id === rule.id)?.state !== rule.state) : [];
  const sign = (): void => {
    setSent(rules);
    signOff.mutate({ seen: rules.map(({ id, state }) => ({ id, state })) }, { onSuccess: () => void navigate(paths.unitTag(number)) });
  };
  return (
    <>
      <PageHeading title={`Sign off No. ${unitNumber(number)}`}>
        Sign off{' '}
        <Link className="inline-block py-1 font-mono tracking-tight text-ink" to={paths.unit(number)}>
          No. {unitNumber(number)}
        </Link>
      </PageHeading>
      <p className="mb-5">
        {page.unit.plate.maker} {page.unit.plate.model}, {page.unit.appliance}. Your word that it is ready: look at what the rules looked
        at.
      </p>
      <section aria-labelledby="rules" className="mb-7 max-w-[900px]">
        <h2 id="rules" className="section-heading">
          The rules
        </h2>
        <ul>
          {rules.map((rule) => (
            <li
              key={rule.id}
              className="grid grid-cols-[28px_1fr] items-center gap-x-2 border-b border-line py-2 wide:grid-cols-[28px_1fr_1fr]"
            >
              <VerdictMark kind={MARK_OF[rule.state]} label={rule.state} />
              <b>{rule.title}</b>
              <span className="lab col-start-2 text-[14px]! wide:col-start-3">
                {rule.id === 'four-eyes' && rule.state === 'missing' ? 'your signature' : rule.evidence}
              </span>
              {rule.state !== 'met' && rule.id !== 'four-eyes' && rule.how !== undefined && (
                <p className="col-start-2 wide:col-span-2">{rule.how}</p>
              )}
            </li>
          ))}
        </ul>
        <p className="mt-3">
          {shop.fourEyes
            ? `Four eyes: nobody who worked on it since it was opened may sign. ${hands.length > 0 ? `${hands.join(', ')} worked on it.` : 'Nobody worked on it.'}`
            : 'Four eyes is switched off in this shop; the tag says so.'}
          {shop.demo && ' Demo shop: the tag prints SAMPLE.'}
        </p>
      </section>
      <SignOffEvidence page={page} demo={shop.demo} currency={shop.currency} />
      <div aria-live="polite" className="mt-7 border-t-2 border-ink pt-4">
        {signOff.error && (
          <ErrorNote error={signOff.error}>
            {changed.length > 0 && (
              <ul className="my-2">
                {changed.map((rule) => (
                  <li key={rule.id} className="flex items-center gap-2">
                    <VerdictMark kind={MARK_OF[rule.state]} label={rule.state} /> {rule.title}: {rule.evidence}
                  </li>
                ))}
              </ul>
            )}
            {conflict && <p>The page shows what stands now.</p>}
          </ErrorNote>
        )}
        {hindered === undefined ? (
          <button type="button" className="button w-full wide:w-auto" disabled={signOff.isPending} onClick={sign}>
            {signOff.isPending ? 'Signing off' : 'Sign off, the tag stands'}
          </button>
        ) : (
          <p className="font-bold">{hindered}</p>
        )}
      </div>
    </>
  );
}
