import { Link } from 'react-router-dom';
import { PageHeading } from '../components/page-heading.js';
import { paths } from '../paths.js';

export function NotFoundPage() {
  return (
    <>
      <PageHeading title="There is no such page" />
      <p className="mt-2">The address may have a slip in it, or the page moved. Every unit is found from the list, by number or serial.</p>
      <Link className="button mt-4" to={paths.units()}>
        To the units
      </Link>
    </>
  );
}
