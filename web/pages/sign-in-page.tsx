import { useNavigate, useSearchParams } from 'react-router-dom';
import { PageHeading } from '../components/page-heading.js';
import { SignInForm } from '../features/session/components/sign-in-form.js';
import { safeBack } from '../paths.js';

export function SignInPage() {
  const navigate = useNavigate();
  const [query] = useSearchParams();
  return (
    <div className="mx-auto max-w-[460px] py-6">
      <PageHeading title="Sign in" />
      <p className="mt-1 mb-5 text-ink2">Buyers need no account: scan the code on the tag.</p>
      <SignInForm onSignedIn={() => void navigate(safeBack(query.get('back')), { replace: true })} />
      <p className="mt-6 border-t border-line pt-4 text-[16px]">
        In the demo shop the accounts, one a role, are printed in the terminal that started Refettle, and kept in{' '}
        <span className="num">demo-accounts.json</span> in its data folder.
      </p>
    </div>
  );
}
