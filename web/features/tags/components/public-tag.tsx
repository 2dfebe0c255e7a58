import type { PublicTag, TagContent } from '../../../../shared/api/tags.js';
import { Caution } from '../../../components/caution.js';
import { PageHeading } from '../../../components/page-heading.js';
import { formatDate, formatTime } from '../../../lib/format.js';
import { TagStanding } from './tag-standing.js';
import { mendedInWords, telephoneLink } from './tag-words.js';
import { TestedList } from './tested-list.js';

type Of<S extends PublicTag['standing']> = Extract<PublicTag, { standing: S }>;

function CallButton({ phone }: { phone: string }) {
  return (
    <a className="button mt-2.5 min-h-14 w-full text-[18px]" href={telephoneLink(phone)}>
      Call {phone}
    </a>
  );
}

function ShopLine({ shop }: { shop: TagContent['shop'] }) {
  return (
    <header className="mb-3.5 flex items-baseline justify-between gap-3 font-bold">
      <span>{shop.name}</span>
      <span className="lab">readiness tag</span>
    </header>
  );
}

function RightMachine({ content }: { content: TagContent }) {
  const { plate } = content;
  const supply = [plate.volts === undefined ? '' : `${plate.volts} V`, plate.watts === undefined ? '' : `${plate.watts} W`]
    .filter(Boolean)
    .join(', ');
  return (
    <>
      <h2 className="mt-6 mb-2">Is it on the right machine?</h2>
      <div className="rating-plate">
        <div>
          <dl className="grid grid-cols-[auto_1fr] items-baseline gap-x-3.5 gap-y-1">
            <dt className="lab">serial</dt>
            <dd className="font-mono text-[22px] font-bold tracking-tight break-all">{plate.serial ?? 'unreadable'}</dd>
            <dt className="lab">machine</dt>
            <dd className="font-mono">
              {plate.maker} {plate.model}
            </dd>
            {supply !== '' && (
              <>
                <dt className="lab">supply</dt>
                <dd className="font-mono">{supply}</dd>
              </>
            )}
          </dl>
        </div>
      </div>
      <p className="mt-2">
        {plate.serial === undefined
          ? 'The rating plate could not be read. Compare maker and model.'
          : 'The rating plate on the machine must say the same.'}{' '}
        If it says something else, the tag was moved: call us.
      </p>
    </>
  );
}

/** How the machine is put up; the calibration run only where the control has one, as the tag's cautions say. */
function Install({ content }: { content: TagContent }) {
  const washes = content.appliance === 'washing machine' || content.appliance === 'dishwasher';
  const spins = content.appliance === 'washing machine';
  const calibrates = content.cautions.some((caution) => caution.includes('calibration run'));
  const steps = [
    ...(spins ? ['Take the transport bolts out before the first run, and keep them.'] : []),
    'Stand it level and firm on all feet.',
    ...(washes ? ['Screw the water hose on by hand, open the tap and look for drips. Hang the drain hose where it can’t slip out.'] : []),
    ...(content.plate.protectionClass === 'I'
      ? ['Plug it straight into an earthed socket: no adapter, no extension lead.']
      : ['Plug it straight into its socket: no adapter, no extension lead.']),
    ...(calibrates
      ? [
          'Let it do its calibration run once where it stands now, empty and shut: moving it made the old one void. We tell you how on the phone.',
        ]
      : []),
  ];
  return (
    <>
      <h2 className="section-heading mt-6">Putting it up</h2>
      <ol className="list-decimal pl-6">
        {steps.map((step) => (
          <li key={step} className="py-1.5">
            {step}
          </li>
        ))}
      </ol>
    </>
  );
}

const daysBetween = (from: string, to: string): number => Math.max(0, Math.floor((Date.parse(to) - Date.parse(from)) / 86_400_000));

function age(content: TagContent, checkedAt: string): string {
  const days = daysBetween(content.signedOffAt, checkedAt);
  return days === 0 ? 'The proof is of today.' : `The proof is ${days} ${days === 1 ? 'day' : 'days'} old.`;
}

/** A tag of this shop: whether it stands, and all that it says. */
export function OurTag({ answer }: { answer: Of<'stands'> | Of<'withdrawn'> }) {
  const { content, checkedAt } = answer;
  const stands = answer.standing === 'stands';
  return (
    <>
      <ShopLine shop={content.shop} />
      <TagStanding
        stands={stands}
        sample={content.sample}
        heading={
          <PageHeading
            title={stands ? `Tag ${content.tag} stands` : `Tag ${content.tag} was withdrawn`}
            className="text-[36px]! leading-[1.05]! font-extrabold! tracking-tight"
          >
            {stands ? 'This tag stands' : 'This tag was withdrawn'}
          </PageHeading>
        }
      >
        <p>
          Tag <b className="num">{content.tag}</b>, signed off {formatDate(content.signedOffAt)} by the shop’s lead.{' '}
          {answer.standing === 'withdrawn' && (
            <>Withdrawn {formatDate(answer.withdrawnAt)}: what it says no longer holds. Call the shop before you use or buy the machine. </>
          )}
          Checked just now, {formatDate(checkedAt)}, <span className="num font-bold">{formatTime(checkedAt)}</span>.{' '}
          {stands && age(content, checkedAt)}
        </p>
      </TagStanding>
      {!stands && <CallButton phone={content.shop.phone} />}
      <RightMachine content={content} />
      {stands && (
        <>
          <h2 className="section-heading mt-6">Warranty</h2>
          <p className="pt-2">
            <b>{content.warrantyMonths} months</b> from the day of sale; the shop wrote it on your tag. Keep the tag. If the machine stops,
            call before anyone opens it.
          </p>
          <CallButton phone={content.shop.phone} />
        </>
      )}
      <h2 className="section-heading mt-6">{stands ? 'What was tested' : 'What had been tested'}</h2>
      <TestedList tested={content.tested} />
      <h2 className="section-heading mt-6">What was mended</h2>
      {content.mended.length === 0 ? (
        <p className="pt-2">Nothing had to be.</p>
      ) : (
        content.mended.map((mended) => (
          <p key={`${mended.part} ${mended.at}`} className="pt-2">
            {mendedInWords(mended)}
          </p>
        ))
      )}
      {stands && <Install content={content} />}
      <Caution className="-mx-4 mt-6">
        {content.cautions.map((caution) => (
          <p key={caution}>{caution}</p>
        ))}
      </Caution>
      {content.sample && (
        <p className="mt-4 font-bold">
          SAMPLE: this tag comes from a demo shop, and its results were simulated. It says nothing about a real machine.
        </p>
      )}
      {!content.fourEyes && <p className="mt-4">In this shop one person tests, mends and signs.</p>}
      <p className="mt-4 text-[16px] text-ink2">
        Says what this shop tested, with which result, on that day. It certifies no compliance with any regulation.
        <br />
        {content.shop.name}, {content.shop.address}
      </p>
    </>
  );
}

/** No tag at all: nothing here may look like one. */
export function NotOurs({ answer }: { answer: Of<'not ours'> }) {
  return (
    <>
      <ShopLine shop={answer.shop} />
      <Caution className="flex-col">
        <PageHeading title="This is no tag of ours" />
        <p className="mt-2">
          {answer.reason} Perhaps it was typed wrongly; perhaps the tag was copied or changed. Trust nothing it says until the shop has told
          you on the phone.
        </p>
      </Caution>
      <div className="mt-5">
        <CallButton phone={answer.shop.phone} />
      </div>
      <p className="mt-4 text-[16px] text-ink2">
        Checked {formatDate(answer.checkedAt)}, {formatTime(answer.checkedAt)}. {answer.shop.name}, {answer.shop.address}
      </p>
    </>
  );
}
