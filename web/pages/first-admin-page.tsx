import { useState } from 'react';
import { Link, useLocation } from 'react-router-dom';
import { PageHeading } from '../components/page-heading.js';
import { FirstAdminForm } from '../features/session/components/first-admin-form.js';
import { paths } from '../paths.js';

/** The token stands behind `#`, which the browser keeps to itself: no proxy logs it. */
export function FirstAdminPage() {
  const [made, setMade] = useState<string>();
  const token = useLocation().hash.slice(1);
  return (
    <div className="mx-auto max-w-[460px] py-6">
      <PageHeading title="The first admin" />
      {made !== undefined ? (
        <div role="status">
          <p className="my-3">{made} is the admin of this shop. The link does not work a second time.</p>
          <Link className="button" to={paths.signIn()}>
            Sign in
          </Link>
        </div>
      ) : token === '' ? (
        <p className="mt-3">
          This page opens with the one-time link that the terminal printed at the first start. Copy the whole link, with what stands behind
          the #.
        </p>
      ) : (
        <>
          <p className="mt-1 mb-5">The admin adds the people of the shop, and keeps its settings and backups. Admins sign nothing off.</p>
          <FirstAdminForm token={token} onMade={setMade} />
        </>
      )}
    </div>
  );
}
