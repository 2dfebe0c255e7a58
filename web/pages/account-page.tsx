import { mayDo } from '../../shared/api/roles.js';
import { PageHeading } from '../components/page-heading.js';
import { ChangePasswordForm } from '../features/account/components/change-password-form.js';
import { SessionList } from '../features/account/components/session-list.js';
import { MyPin } from '../features/benches/components/my-pin-form.js';
import { useSignedIn } from '../lib/signed-in.js';

export function AccountPage() {
  const { user, shop } = useSignedIn();
  return (
    <>
      <PageHeading title="Your account" />
      <p className="mb-6">
        {user.name}, {user.role} of {shop.name}. You sign in by {user.email}.
      </p>
      <div className="grid gap-x-11 gap-y-9 wide:grid-cols-2">
        <div className="grid content-start gap-9">
          <ChangePasswordForm email={user.email} />
          {mayDo(user.role, 'run.record') && <MyPin />}
        </div>
        <SessionList whose="me" name={user.name} />
      </div>
    </>
  );
}
