import { useInfiniteQuery } from '@tanstack/react-query';
import { Link, useSearchParams } from 'react-router-dom';
import type { AuditFilter } from '../../shared/api/audit.js';
import { mayDo } from '../../shared/api/roles.js';
import { PageHeading } from '../components/page-heading.js';
import { ErrorNote, Pending } from '../components/page-states.js';
import { auditCsvUrl, auditQuery } from '../features/audit/api/list-audit.js';
import { AuditFilterForm } from '../features/audit/components/audit-filter-form.js';
import { filterInAddress } from '../features/audit/components/audit-filter.js';
import { AuditList } from '../features/audit/components/audit-list.js';
import { useSignedIn } from '../lib/signed-in.js';
import { paths } from '../paths.js';

export function AuditPage() {
  const { user } = useSignedIn();
  const [query] = useSearchParams();
  const filter = filterInAddress(query);
  return (
    <>
      <PageHeading title="Audit log" />
      {mayDo(user.role, 'audit.read') ? (
        <>
          <p className="max-w-[720px]">Who changed what, when, before and after. Nobody can change it.</p>
          <AuditFilterForm />
          <Log filter={filter} />
        </>
      ) : (
        <p className="py-6">Admins read the audit log. You are signed in as {user.role}.</p>
      )}
    </>
  );
}

function Log({ filter }: { filter: AuditFilter }) {
  const log = useInfiniteQuery(auditQuery(filter));
  const rows = log.data?.pages.flatMap(({ items }) => items) ?? [];
  const filtered = Object.keys(filter).length > 0;
  return (
    <>
      <p className="mb-4 flex flex-wrap gap-x-6">
        <a className="tap" href={auditCsvUrl(filter)} download>
          {filtered ? 'These as CSV' : 'All of it as CSV'}
        </a>
        {filtered && (
          <Link className="tap" to={paths.audit()}>
            Without a filter
          </Link>
        )}
      </p>
      <p role="status" className="sr-only">
        {log.data ? `${rows.length} changes shown` : ''}
      </p>
      {log.isPending && <Pending what="the log" />}
      {log.isError && <ErrorNote error={log.error} retry={() => void log.refetch()} />}
      {log.data && rows.length === 0 && (
        <p className="py-4">{filtered ? 'Nothing like that is in the log.' : 'Nothing is in the log yet.'}</p>
      )}
      <AuditList rows={rows} />
      {log.hasNextPage && (
        <button
          type="button"
          className="button button-plain mt-4"
          disabled={log.isFetchingNextPage}
          onClick={() => void log.fetchNextPage()}
        >
          {log.isFetchingNextPage ? 'Fetching more' : 'Earlier changes'}
        </button>
      )}
    </>
  );
}
