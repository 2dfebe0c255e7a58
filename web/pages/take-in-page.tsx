import { useQuery } from '@tanstack/react-query';
import { useNavigate } from 'react-router-dom';
import { mayDo } from '../../shared/api/roles.js';
import { PageHeading } from '../components/page-heading.js';
import { Fetched } from '../components/page-states.js';
import { sheetsQuery } from '../features/sheets/api/list-sheets.js';
import { TakeInForm } from '../features/units/components/take-in-form.js';
import { useSignedIn } from '../lib/signed-in.js';
import { paths } from '../paths.js';

export function TakeInPage() {
  const { user, shop } = useSignedIn();
  const navigate = useNavigate();
  const sheets = useQuery(sheetsQuery);
  return (
    <Fetched query={sheets} what="the service sheets">
      {({ items }) => (
        <>
          <PageHeading title="Take in a unit" className="mb-5" />
          {mayDo(user.role, 'unit.take-in') ? (
            <TakeInForm sheets={items} currency={shop.currency} onTakenIn={(unit) => void navigate(paths.unit(unit.number))} />
          ) : (
            <p>Technicians and leads take units in. You are signed in as {user.role}.</p>
          )}
        </>
      )}
    </Fetched>
  );
}
