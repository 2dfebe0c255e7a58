import { useMemo } from 'react';
import { useQuery } from '@tanstack/react-query';
import { Link, useParams } from 'react-router-dom';
import type { CapturePage as CapturePageData } from '../../shared/api/captures.js';
import { viewCapture } from '../../shared/decode/view-capture.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import { PageHeading } from '../components/page-heading.js';
import { Fetched } from '../components/page-states.js';
import { captureQuery } from '../features/captures/api/get-capture.js';
import { CaptureCodes } from '../features/captures/components/capture-codes.js';
import { CaptureTable } from '../features/captures/components/capture-table.js';
import { aboutTheLamps } from '../features/captures/components/capture-words.js';
import { StripChart } from '../features/captures/components/strip-chart.js';
import { formatDayTime, plural, unitNumber } from '../lib/format.js';
import { paths } from '../paths.js';

const SOURCES: Record<CapturePageData['capture']['source'], string> = {
  probe: 'light probe',
  keys: 'by keys',
  clip: 'from a clip',
  simulated: 'simulated',
};

export function CapturePage() {
  const { id = '' } = useParams();
  const capture = useQuery(captureQuery(id));
  return (
    <Fetched query={capture} what="the capture">
      {(page) => <CaptureInFull page={page} />}
    </Fetched>
  );
}

/** Hands the file out as it was stored, line for line. */
function saveFile(page: CapturePageData): void {
  const url = URL.createObjectURL(new Blob([page.file], { type: 'application/x-ndjson' }));
  const link = document.createElement('a');
  link.href = url;
  link.download = `${unitNumber(page.unit.number)}-${page.capture.capturedAt.replace(/[:.]/g, '')}.lamps.ndjson`;
  link.click();
  URL.revokeObjectURL(url);
}

function CaptureInFull({ page }: { page: CapturePageData }) {
  const { sheet, unit } = page;
  const { answer } = page.capture;
  const capture = useMemo(() => readCapture(page.file), [page.file]);
  const view = useMemo(() => viewCapture(capture, sheet), [capture, sheet]);
  const facts = [
    formatDayTime(page.at),
    page.by.name,
    SOURCES[page.capture.source],
    page.simulated && page.capture.source !== 'simulated' ? 'simulated rig' : '',
    `${answer.durationS.toFixed(1)} s`,
    plural(answer.samples, 'sample'),
    answer.lost > 0 ? `${answer.lost} lost` : '',
    `sheet ${sheet.family}, edition ${sheet.edition}`,
  ];
  return (
    <>
      <div className="mb-3 flex flex-wrap items-center gap-x-6 gap-y-2">
        <PageHeading title={`Capture of No. ${unitNumber(unit.number)}`}>
          Capture of{' '}
          <Link className="inline-block py-1 font-mono tracking-tight text-ink" to={paths.unit(unit.number)}>
            No. {unitNumber(unit.number)}
          </Link>
        </PageHeading>
        <p className="lab w-full text-[14px]! wide:order-last">{facts.filter(Boolean).join('; ')}</p>
        <div className="flex w-full gap-2.5 wide:ml-auto wide:w-auto">
          {page.runId !== undefined && (
            <Link className="button button-plain flex-1 whitespace-nowrap" to={paths.run(page.runId)}>
              Bench log
            </Link>
          )}
          <button type="button" className="button button-plain flex-1 whitespace-nowrap" onClick={() => saveFile(page)}>
            Save the file
          </button>
        </div>
      </div>
      <StripChart capture={capture} sheet={sheet} answer={answer} view={view} />
      <div className="mt-3 grid gap-x-11 gap-y-6 border-t-2 border-ink pt-4 min-[1100px]:grid-cols-[minmax(0,1fr)_300px]">
        <CaptureCodes answer={answer} view={view} sheet={sheet} faces={page.faces} />
        <section aria-labelledby="lamps-themselves">
          <h2 id="lamps-themselves" className="mb-1.5">
            The lamps themselves
          </h2>
          {aboutTheLamps(answer, view, sheet, answer.cut).map((sentence) => (
            <p key={sentence} className="mb-2.5">
              {sentence}
            </p>
          ))}
        </section>
      </div>
      <CaptureTable answer={answer} capture={capture} />
    </>
  );
}
