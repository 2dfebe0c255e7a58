import { useEffect } from 'react';
import { useQuery } from '@tanstack/react-query';
import { Link, Navigate, Outlet, ScrollRestoration, useParams, useSearchParams } from 'react-router-dom';
import type { PublicTag } from '../../shared/api/tags.js';
import { Fetched } from '../components/page-states.js';
import { MarkDefinitions } from '../components/verdict.js';
import { publicTagQuery } from '../features/tags/api/get-public-tag.js';
import { NotOurs, OurTag } from '../features/tags/components/public-tag.js';
import { paths } from '../paths.js';

/** The buyer's frame: no menu, no account, phone first. */
export function PublicTagFrame() {
  useEffect(() => {
    document.body.classList.add('buyer');
    return () => document.body.classList.remove('buyer');
  }, []);
  return (
    <div className="mx-auto max-w-[480px] text-[18px]">
      <MarkDefinitions />
      <ScrollRestoration />
      <a className="skip" href="#main">
        Skip to the page
      </a>
      <main id="main" className="px-4 pt-3.5 pb-8">
        <Outlet />
      </main>
    </div>
  );
}

export function PublicTagPage() {
  const { tag = '', signature } = useParams();
  const [query] = useSearchParams();
  const word = query.get('word');
  const proof = { ...(signature === undefined ? {} : { signature }), ...(word === null ? {} : { word }) };
  if (signature === undefined && word === null) return <Navigate to={paths.lookUpTag(tag)} replace />;
  return <Checked key={`${tag} ${signature} ${word}`} tag={tag} proof={proof} />;
}

function Checked({ tag, proof }: { tag: string; proof: { signature?: string; word?: string } }) {
  const answer = useQuery(publicTagQuery(tag, proof));
  return (
    <Fetched query={answer} what="whether this tag stands">
      {(found: PublicTag) => (
        <>
          {found.standing === 'not ours' ? <NotOurs answer={found} /> : <OurTag answer={found} />}
          <Link className="tap mt-2 text-[16px]" to={paths.lookUpTag()}>
            Look up another tag
          </Link>
        </>
      )}
    </Fetched>
  );
}
