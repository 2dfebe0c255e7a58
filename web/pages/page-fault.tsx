import { useRouteError } from 'react-router-dom';
import { PageHeading } from '../components/page-heading.js';

/** A page that broke while it was drawn, or a part of it that could not be loaded. */
export function PageFault() {
  const error = useRouteError();
  const message = error instanceof Error ? error.message : String(error);
  return (
    <div className="page mx-auto">
      <PageHeading title="This page broke" />
      <div role="alert" className="mt-3">
        <p>Nothing that was recorded is lost. Load the page again; if it breaks again, tell the admin what stands here:</p>
        <p className="num my-3 border-l-4 border-edge pl-3 whitespace-normal!">{message}</p>
      </div>
      <button type="button" className="button" onClick={() => location.reload()}>
        Load the page again
      </button>
    </div>
  );
}
