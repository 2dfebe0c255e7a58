import { useQuery } from '@tanstack/react-query';
import { Link, useLocation, useNavigate } from 'react-router-dom';
import { PageHeading } from '../components/page-heading.js';
import { ErrorNote, Pending } from '../components/page-states.js';
import { linkQuery } from '../features/account/api/one-time-link.js';
import { SetPasswordForm } from '../features/account/components/set-password-form.js';
import { ApiProblem } from '../lib/api-problem.js';
import { formatDayTime } from '../lib/format.js';
import { paths } from '../paths.js';

/** Behind a one-time link: its token stands behind `#`, which the browser keeps to itself. */
export function LinkPage() {
  const token = useLocation().hash.slice(1);
  return (
    <div className="mx-auto max-w-[460px] py-6">
      {token === '' ? (
        <>
          <PageHeading title="A link is missing" />
          <p className="mt-3">
            This page opens with the one-time link that an admin made. Copy the whole link, with what stands behind the #.
          </p>
        </>
      ) : (
        <WithToken token={token} />
      )}
    </div>
  );
}

function WithToken({ token }: { token: string }) {
  const navigate = useNavigate();
  const link = useQuery({ ...linkQuery(token), retry: false });
  if (link.isPending) return <Pending what="whose link this is" />;
  if (link.isError) {
    const usedUp = link.error instanceof ApiProblem && link.error.status === 401;
    return (
      <>
        <PageHeading title={usedUp ? 'This link no longer opens' : 'Could not look at the link'} />
        {usedUp ? (
          <p className="my-3">
            It was used already, it is too old, or a newer one was made. An admin of the shop makes another; if you have set your password,
            just sign in.
          </p>
        ) : (
          <ErrorNote error={link.error} retry={() => void link.refetch()} />
        )}
        <Link className="button" to={paths.signIn()}>
          Sign in
        </Link>
      </>
    );
  }
  const { name, email, kind, shop, expiresAt } = link.data;
  return (
    <>
      <PageHeading title={kind === 'invitation' ? `Welcome, ${name}` : `A new password for ${name}`} />
      <p className="mt-1 mb-5">
        {kind === 'invitation' ? `You are invited to ${shop || 'this shop'}.` : 'Wherever you are signed in now, you will be signed out.'}{' '}
        The link works once, until {formatDayTime(expiresAt)}.
      </p>
      <SetPasswordForm token={token} email={email} onSignedIn={() => void navigate(paths.units(), { replace: true })} />
    </>
  );
}
