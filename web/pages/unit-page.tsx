import { lazy, Suspense, useCallback } from 'react';
import { useQuery, useQueryClient } from '@tanstack/react-query';
import { Link, useSearchParams } from 'react-router-dom';
import { mayDo } from '../../shared/api/roles.js';
import type { UnitPage as UnitPageData } from '../../shared/api/units.js';
import { countingEvents, type UnitFacts } from '../../shared/readiness/facts.js';
import type { RuleResult } from '../../shared/readiness/readiness.js';
import { PageHeading } from '../components/page-heading.js';
import { ErrorNote, Fetched, Pending } from '../components/page-states.js';
import { RatingPlate } from '../components/rating-plate.js';
import { useLive, type Live } from '../features/live/api/hear-live.js';
import { LivePanel } from '../features/live/components/live-panel.js';
import { sheetQuery } from '../features/sheets/api/get-sheet.js';
import { LOOK_AGAIN_MS, unitQuery } from '../features/units/api/get-unit.js';
import { BeforeAfter } from '../features/units/components/before-after.js';
import { GateBanner } from '../features/units/components/gate-banner.js';
import { HangingTag } from '../features/units/components/hanging-tag.js';
import { Timeline } from '../features/units/components/timeline.js';
import { formatDate, formatMoney, plural, unitNumber } from '../lib/format.js';
import { useSignedIn, type SignedIn } from '../lib/signed-in.js';
import { useUnitNumber } from '../lib/unit-number.js';
import { paths } from '../paths.js';
import { NotFoundPage } from './not-found-page.js';

/** Most who open a unit only look: the form comes when it is asked for. */
const RepairForm = lazy(async () => ({ default: (await import('../features/units/components/repair-form.js')).RepairForm }));

const LOOKS_BY_ITSELF = `This page looks every ${String(LOOK_AGAIN_MS / 1000)} seconds until it is back.`;

export function UnitPage() {
  const number = useUnitNumber();
  return number === undefined ? <NotFoundPage /> : <Unit number={number} key={number} />;
}

function Unit({ number }: { number: number }) {
  const signedIn = useSignedIn();
  const client = useQueryClient();
  const changed = useCallback(() => void client.invalidateQueries({ queryKey: unitQuery(number).queryKey }), [client, number]);
  const live = useLive(number, changed);
  const unit = useQuery({ ...unitQuery(number), refetchInterval: live.up ? false : LOOK_AGAIN_MS });
  return (
    <Fetched query={unit} what={`unit ${unitNumber(number)}`}>
      {(page) => (
        <>
          {unit.isError && <ErrorNote error={unit.error} retry={() => void unit.refetch()} />}
          <UnitInFull page={page} signedIn={signedIn} live={live} />
        </>
      )}
    </Fetched>
  );
}

function Complaint({ page, signedIn }: { page: UnitPageData; signedIn: SignedIn }) {
  const { unit } = page;
  const opened = page.events.findLast((event) => event.kind === 'intake' || event.kind === 'returned');
  const complaint = opened?.kind === 'intake' || opened?.kind === 'returned' ? opened.complaint : unit.complaint;
  return (
    <>
      <p>
        <b>
          {opened?.kind === 'returned' ? 'Came back' : 'Taken in'} {formatDate(opened?.at ?? unit.takenInAt)}.
        </b>{' '}
        “{complaint}”
      </p>
      <p className="lab mt-1.5">
        {[unit.source && `from ${unit.source}`, `paid ${formatMoney(unit.costMinor, signedIn.shop.currency)}`].filter(Boolean).join(', ')}
      </p>
      {unit.sameSerial && (
        <p className="mt-1.5">
          Same serial as{' '}
          {unit.sameSerial.units.map((other, index) => (
            <span key={other}>
              {index > 0 && ', '}
              <Link to={paths.unit(other)}>No. {unitNumber(other)}</Link>
            </span>
          ))}
          : {unit.sameSerial.reason}.
        </p>
      )}
    </>
  );
}

function UnitInFull({ page, signedIn, live }: { page: UnitPageData; signedIn: SignedIn; live: Live }) {
  const { unit, readiness, tag, energising } = page;
  const { user, shop } = signedIn;
  const [query, setQuery] = useSearchParams();
  const sheet = useQuery(sheetQuery(unit.family));
  const stands = tag?.standing === 'stands';
  const toGo = readiness.rules.filter((rule) => rule.state !== 'met' && rule.id !== 'four-eyes').length;
  const mayRepair = mayDo(user.role, 'repair.record');
  const maySign = mayDo(user.role, 'unit.sign-off') && readiness.readyToSign && !stands;
  const repairing = mayRepair && query.get('do') === 'repair';
  const facts: UnitFacts = {
    unit: { number: unit.number, protectionClass: unit.plate.protectionClass, licensedOnly: unit.licensedOnly },
    sheet: undefined,
    events: page.events,
    shop,
  };
  const title = `No. ${unitNumber(unit.number)}`;
  const actionFor = (rule: RuleResult) =>
    rule.id === 'four-eyes' && maySign ? (
      <Link className="button" to={paths.signOff(unit.number)}>
        Sign off
      </Link>
    ) : null;
  const setRepairing = (open: boolean): void => setQuery(open ? { do: 'repair' } : {}, { replace: true, preventScrollReset: true });

  return (
    <>
      <div className="unit-head">
        <HangingTag
          page={page}
          heading={<PageHeading title={title} />}
          actionFor={actionFor}
          complaint={<Complaint page={page} signedIn={signedIn} />}
        />
        <aside aria-label="Rating plate">
          <RatingPlate
            plate={unit.plate}
            control={unit.family === undefined ? 'no service sheet' : (sheet.data?.sheet.title ?? unit.family)}
          />
        </aside>
      </div>
      <LivePanel live={live} meanwhile={LOOKS_BY_ITSELF} />
      <GateBanner gate={energising} number={unit.number} mayOverride={mayDo(user.role, 'override.record')} />
      <div className="mt-5 flex flex-wrap gap-3">
        {tag && (
          <Link className={stands ? 'button' : 'button button-plain'} to={paths.unitTag(unit.number)}>
            {stands ? 'Print the tag' : 'Open the withdrawn tag'}
          </Link>
        )}
        <Link className="button button-plain" to={paths.unitLabels(unit.number, 'stock')}>
          Stock label
        </Link>
        <Link className="button button-plain" to={paths.unitLabels(unit.number, 'price')}>
          Price label
        </Link>
        {mayRepair && !repairing && (
          <button type="button" className="button button-plain" onClick={() => setRepairing(true)}>
            Record a repair
          </button>
        )}
        {!stands && !readiness.readyToSign && (
          <p className="self-center text-ink2">A lead signs off when every rule but four eyes is met. {plural(toGo, 'rule')} to go.</p>
        )}
      </div>
      {repairing && (
        <Suspense fallback={<Pending what="the form" />}>
          <RepairForm
            number={unit.number}
            parts={sheet.data?.sheet.parts ?? []}
            currency={shop.currency}
            onDone={() => setRepairing(false)}
          />
        </Suspense>
      )}
      <div className="mt-7 grid items-start gap-x-11 gap-y-7 min-[1100px]:grid-cols-[minmax(0,1fr)_minmax(0,440px)]">
        <section aria-labelledby="happened" className="min-w-0">
          <h2 id="happened" className="section-heading">
            What happened, newest first
          </h2>
          {page.events.length === 0 ? (
            <p className="py-4">Nothing yet.</p>
          ) : (
            <Timeline page={page} userId={user.id} currency={shop.currency} demo={shop.demo} nowMs={Date.now()} />
          )}
          {page.runs.length === 0 && (
            <p className="py-4">
              No bench run yet. At the bench: <code className="num">refettle run SCRIPT {unitNumber(unit.number)}</code>
            </p>
          )}
        </section>
        <BeforeAfter counting={countingEvents(facts)} />
      </div>
    </>
  );
}
