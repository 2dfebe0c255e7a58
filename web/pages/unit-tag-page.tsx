import { useCallback } from 'react';
import { useQuery, useQueryClient } from '@tanstack/react-query';
import { Link, useSearchParams } from 'react-router-dom';
import { mayDo } from '../../shared/api/roles.js';
import type { TagPage } from '../../shared/api/tags.js';
import { TAG_FORMATS } from '../../shared/paper/sizes.js';
import { Caution } from '../components/caution.js';
import { PageHeading } from '../components/page-heading.js';
import { Fetched } from '../components/page-states.js';
import { usePrinting } from '../components/printing.js';
import { useLive } from '../features/live/api/hear-live.js';
import { useAskWhetherTagsStand } from '../features/tags/api/ask-whether-tags-stand.js';
import { unitTagQuery } from '../features/tags/api/get-unit-tag.js';
import { PrintedTags } from '../features/tags/components/printed-tags.js';
import { TagFormatTabs } from '../features/tags/components/tag-format-tabs.js';
import { useTagsBeside } from '../features/tags/components/tags-beside.js';
import { TagStanding } from '../features/tags/components/tag-standing.js';
import { mendedInWords } from '../features/tags/components/tag-words.js';
import { TestedList } from '../features/tags/components/tested-list.js';
import { WithdrawForm } from '../features/tags/components/withdraw-form.js';
import { LOOK_AGAIN_MS } from '../features/units/api/get-unit.js';
import { formatDate, formatDayTime, unitNumber } from '../lib/format.js';
import { useSignedIn } from '../lib/signed-in.js';
import { useUnitNumber } from '../lib/unit-number.js';
import { paths } from '../paths.js';
import { NotFoundPage } from './not-found-page.js';

export function UnitTagPage() {
  const number = useUnitNumber();
  return number === undefined ? <NotFoundPage /> : <UnitTag number={number} key={number} />;
}

function UnitTag({ number }: { number: number }) {
  const client = useQueryClient();
  // A tag that is withdrawn while somebody looks at it does not go on looking as if it stood.
  const changed = useCallback(() => void client.invalidateQueries({ queryKey: unitTagQuery(number).queryKey }), [client, number]);
  const live = useLive(number, changed);
  const tag = useQuery({ ...unitTagQuery(number), refetchInterval: live.up ? false : LOOK_AGAIN_MS });
  return (
    <Fetched query={tag} what={`the tag of unit ${unitNumber(number)}`}>
      {(page) => <TagInFull tag={page} unit={number} />}
    </Fetched>
  );
}

function TagInFull({ tag, unit }: { tag: TagPage; unit: number }) {
  const { user } = useSignedIn();
  const { content } = tag;
  const stands = tag.state.standing === 'stands';
  const [query] = useSearchParams();
  const format = TAG_FORMATS.find((one) => one === query.get('format')) ?? 'a6';
  const beside = useTagsBeside(unit, query.get('with') ?? '');
  const shown = [{ unit, tag }, ...beside.tags];
  const askWhetherTagsStand = useAskWhetherTagsStand();
  const printing = usePrinting(async () => {
    const why = await askWhetherTagsStand(shown);
    return why === undefined ? { go: true } : { go: false, why };
  });
  return (
    <div className="paper-beside grid items-start gap-x-11 gap-y-6 min-[1100px]:grid-cols-[minmax(0,auto)_minmax(0,1fr)]">
      <div className="beside-paper max-w-[620px] min-w-0 min-[1100px]:order-last">
        <TagStanding
          stands={stands}
          sample={content.sample}
          heading={
            <PageHeading
              title={`Tag ${content.tag} ${stands ? 'stands' : 'was withdrawn'}`}
              className="text-[30px]! leading-tight font-extrabold!"
            >
              {stands ? 'This tag stands' : 'This tag was withdrawn'}
            </PageHeading>
          }
        >
          <p>
            Tag <b className="num">{content.tag}</b>, signed off {formatDate(content.signedOffAt)} by {content.signedOffBy}.
          </p>
          {tag.withdrawn && (
            <p className="mt-2">
              Withdrawn {formatDayTime(tag.withdrawn.at)}: {tag.withdrawn.reason}.
            </p>
          )}
        </TagStanding>
        {printing.refused}
        {stands && (
          <>
            <TagFormatTabs format={format} linkTo={(one) => paths.unitTag(unit, { format: one, with: query.get('with') ?? undefined })} />
            {beside.form}
          </>
        )}
        <div className="mt-4 flex flex-wrap gap-3">
          {stands && (
            <button type="button" className="button" disabled={beside.pending || printing.asking} onClick={printing.print}>
              Print it
            </button>
          )}
          <Link className="button button-plain" to={paths.unit(unit)}>
            To No. {unitNumber(unit)}
          </Link>
          <a className="button button-plain" href={tag.url}>
            The buyer’s page
          </a>
        </div>
        <h2 className="section-heading mt-7">What it says</h2>
        <TestedList tested={content.tested} />
        <p className="mt-3">
          <b>Mended:</b> {content.mended.length === 0 ? 'nothing had to be.' : content.mended.map(mendedInWords).join(' ')}
        </p>
        <p className="mt-2">
          Who can’t scan looks up <b className="num">{content.tag}</b> with the word <b className="num">{content.lookUpWord}</b>.
        </p>
        <Caution className="mt-4">{content.cautions.join(' ')}</Caution>
        {stands && mayDo(user.role, 'tag.withdraw') && <WithdrawForm unit={unit} tag={content.tag} />}
      </div>
      {stands && (
        <div className="min-w-0">
          <PrintedTags tags={shown.map((one) => one.tag)} format={format} />
        </div>
      )}
    </div>
  );
}
