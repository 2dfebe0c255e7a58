import { useNavigate, useSearchParams } from 'react-router-dom';
import { PageHeading } from '../components/page-heading.js';
import { LookUpForm } from '../features/tags/components/look-up-form.js';
import { paths } from '../paths.js';

export function LookUpTagPage() {
  const navigate = useNavigate();
  const [query] = useSearchParams();
  return (
    <>
      <PageHeading title="Does a tag still stand?" className="mt-4" />
      <p className="my-3">Scan the code on the tag, or type the two things that stand under it: its number, and the word of four signs.</p>
      <LookUpForm tag={query.get('tag') ?? ''} onAsked={(asked) => void navigate(paths.publicTagByWord(asked.tag, asked.word))} />
    </>
  );
}
