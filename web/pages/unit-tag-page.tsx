import { useQuery } from '@tanstack/react-query';
import { Link } from 'react-router-dom';
import { mayDo } from '../../shared/api/roles.js';
import type { TagPage } from '../../shared/api/tags.js';
import { Caution } from '../components/caution.js';
import { PageHeading } from '../components/page-heading.js';
import { Fetched } from '../components/page-states.js';
import { unitTagQuery } from '../features/tags/api/get-unit-tag.js';
import { TagSheet } from '../features/tags/components/tag-sheet.js';
import { TagStanding } from '../features/tags/components/tag-standing.js';
import { mendedInWords } from '../features/tags/components/tag-words.js';
import { TestedList } from '../features/tags/components/tested-list.js';
import { WithdrawForm } from '../features/tags/components/withdraw-form.js';
import { formatDate, formatDayTime, unitNumber } from '../lib/format.js';
import { useSignedIn } from '../lib/signed-in.js';
import { useUnitNumber } from '../lib/unit-number.js';
import { paths } from '../paths.js';
import { NotFoundPage } from './not-found-page.js';

export function UnitTagPage() {
  const number = useUnitNumber();
  return number === undefined ? <NotFoundPage /> : <UnitTag number={number} />;
}

function UnitTag({ number }: { number: number }) {
  const tag = useQuery(unitTagQuery(number));
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
  return (
    <div className="grid items-start gap-x-11 gap-y-6 min-[1100px]:grid-cols-[auto_minmax(0,1fr)]">
      <div className="beside-tag max-w-[620px] min-w-0 min-[1100px]:order-last">
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
        <div className="mt-4 flex flex-wrap gap-3">
          {stands && (
            <button type="button" className="button" onClick={() => window.print()}>
              Print it, A6
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
        <div>
          <TagSheet tag={tag} />
        </div>
      )}
    </div>
  );
}
