import { useQuery } from '@tanstack/react-query';
import { Navigate, useLocation, useNavigate } from 'react-router-dom';
import { PageError, Pending } from '../components/page-states.js';
import { ShopFrame } from '../components/shop-frame.js';
import { meQuery } from '../features/session/api/get-me.js';
import { useEndSession } from '../features/session/api/end-session.js';
import { ApiProblem } from '../lib/api-problem.js';
import { SignedInContext } from '../lib/signed-in.js';
import { paths } from '../paths.js';

/** Makes sure that somebody is signed in before any page below asks for anything; else to the sign-in page, and back from there. */
export function SignedInLayout() {
  const me = useQuery(meQuery);
  const endSession = useEndSession();
  const navigate = useNavigate();
  const { pathname, search } = useLocation();

  if (me.error instanceof ApiProblem && me.error.status === 401) return <Navigate to={paths.signIn(`${pathname}${search}`)} replace />;
  if (me.data === undefined) {
    return (
      <ShopFrame>
        {me.isError ? (
          <PageError error={me.error} retry={() => void me.refetch()} what="who is signed in" />
        ) : (
          <Pending what="who is signed in" />
        )}
      </ShopFrame>
    );
  }
  const signOut = (): void => endSession.mutate(undefined, { onSuccess: () => void navigate(paths.signIn(), { replace: true }) });
  return (
    <SignedInContext value={me.data}>
      <ShopFrame user={me.data.user} onSignOut={signOut} find={pathname !== paths.units()} />
    </SignedInContext>
  );
}
