import { useQuery, useQueryClient } from '@tanstack/react-query';
import { useCallback, useState } from 'react';
import { Link, useSearchParams } from 'react-router-dom';
import type { UnitPage } from '../../shared/api/units.js';
import { standingTagOf } from '../../shared/paper/label-content.js';
import { LABEL_FORMATS, readLabelSize, USUAL_LABEL } from '../../shared/paper/sizes.js';
import { isLoopbackAddress } from '../../shared/paper/unit-address.js';
import { FormField } from '../components/form-field.js';
import { PageHeading } from '../components/page-heading.js';
import { Fetched } from '../components/page-states.js';
import { nobodyCanSay, usePrinting, type MayPrint } from '../components/printing.js';
import { UnitLabel, type LabelWish } from '../features/labels/components/unit-label.js';
import { useLive } from '../features/live/api/hear-live.js';
import { LOOK_AGAIN_MS, unitQuery } from '../features/units/api/get-unit.js';
import { parseMoney, unitNumber } from '../lib/format.js';
import { useSignedIn } from '../lib/signed-in.js';
import { useUnitNumber } from '../lib/unit-number.js';
import { paths } from '../paths.js';
import { NotFoundPage } from './not-found-page.js';

export function UnitLabelsPage() {
  const number = useUnitNumber();
  return number === undefined ? <NotFoundPage /> : <UnitLabels number={number} key={number} />;
}

function UnitLabels({ number }: { number: number }) {
  const client = useQueryClient();
  const changed = useCallback(() => void client.invalidateQueries({ queryKey: unitQuery(number).queryKey }), [client, number]);
  const live = useLive(number, changed);
  const unit = useQuery({ ...unitQuery(number), refetchInterval: live.up ? false : LOOK_AGAIN_MS });
  return (
    <Fetched query={unit} what={`unit ${unitNumber(number)}`}>
      {(page) => <Labels page={page} />}
    </Fetched>
  );
}

/** What is on the label stands in the address, so that a label can be kept as a bookmark; price and grade are typed each time. */
function Labels({ page }: { page: UnitPage }) {
  const { shop } = useSignedIn();
  const [query, setQuery] = useSearchParams();
  const [price, setPrice] = useState('');
  const [grade, setGrade] = useState('');
  const number = page.unit.number;
  const kind = query.get('kind') === 'price' ? 'price' : 'stock';
  const code = query.get('code') === 'bars' ? 'bars' : 'qr';
  const sizeText = query.get('size') ?? USUAL_LABEL;
  const size = readLabelSize(sizeText);
  const priceMinor = parseMoney(price, shop.currency);
  const wish: LabelWish | undefined =
    kind === 'stock' ? { kind, code } : Number.isNaN(priceMinor) ? undefined : { kind, priceMinor, grade };
  const change = (name: 'code' | 'size', value: string): void => {
    const next = new URLSearchParams(query);
    next.set(name, value);
    setQuery(next, { replace: true, preventScrollReset: true });
  };
  const title = `Labels of No. ${unitNumber(number)}`;
  const tag = standingTagOf(page);
  const ask = useAskWhetherTagIsThis();
  const printing = usePrinting(() => (kind === 'price' ? ask(number, tag) : Promise.resolve({ go: true })));

  return (
    <>
      <div className="beside-paper mb-5 max-w-[760px]">
        <PageHeading title={title} />
        <p className="mt-1">
          {page.unit.plate.maker} {page.unit.plate.model}, {page.unit.appliance}
        </p>
        <nav aria-label="Which label" className="word-tabs mt-4 border-b border-line">
          {(['stock', 'price'] as const).map((one) => (
            <Link
              key={one}
              to={paths.unitLabels(number, one, query.get('size') ?? undefined)}
              replace
              aria-current={one === kind ? 'true' : undefined}
            >
              {one === 'stock' ? 'Stock label' : 'Price label'}
            </Link>
          ))}
        </nav>
        <div className="mt-4 grid grid-cols-[repeat(auto-fit,minmax(min(100%,220px),1fr))] gap-4">
          {kind === 'price' && (
            <>
              <FormField
                id="label-price"
                label={`Price in ${shop.currency}`}
                hint="Like 129.00; it is not stored."
                error={price !== '' && Number.isNaN(priceMinor) ? 'Write a sum of money, like 129.00.' : undefined}
              >
                {(a11y) => (
                  <input
                    {...a11y}
                    className="field"
                    inputMode="decimal"
                    autoComplete="off"
                    value={price}
                    onChange={(event) => setPrice(event.target.value)}
                  />
                )}
              </FormField>
              <FormField id="label-grade" label="Grade" hint="Like B; may be left out.">
                {(a11y) => (
                  <input
                    {...a11y}
                    className="field"
                    maxLength={12}
                    autoComplete="off"
                    value={grade}
                    onChange={(event) => setGrade(event.target.value)}
                  />
                )}
              </FormField>
            </>
          )}
          <FormField
            id="label-size"
            label="Size in mm"
            hint="Width x height, as the roll says."
            error={size ? undefined : 'Write width x height, like 62x29: at least 40x20, at most 210x297.'}
          >
            {(a11y) => (
              <>
                <input
                  {...a11y}
                  className="field"
                  list="label-sizes"
                  autoComplete="off"
                  defaultValue={sizeText}
                  onChange={(event) => change('size', event.target.value)}
                />
                <datalist id="label-sizes">
                  {LABEL_FORMATS.map((one) => (
                    <option key={one} value={one} />
                  ))}
                </datalist>
              </>
            )}
          </FormField>
          {kind === 'stock' && (
            <FormField id="label-code" label="Code" hint="What a scanner reads off it.">
              {(a11y) => (
                <select {...a11y} className="field" value={code} onChange={(event) => change('code', event.target.value)}>
                  <option value="qr">QR: opens this unit’s page</option>
                  <option value="bars">Bars: its number</option>
                </select>
              )}
            </FormField>
          )}
        </div>
        {kind === 'price' && tag === undefined && (
          <p className="mt-4 font-bold">It has no standing tag: the label says “for parts only, no tag”.</p>
        )}
        {kind === 'stock' && code === 'qr' && isLoopbackAddress(window.location.origin) && (
          <p className="mt-4">
            The code points to {window.location.origin}, which no phone can open. Open this page by the server’s name on the network, or
            print bars.
          </p>
        )}
        {printing.refused}
        <div className="mt-4 flex flex-wrap gap-3">
          {wish && size && (
            <button type="button" className="button" disabled={printing.asking} onClick={printing.print}>
              Print the {kind} label
            </button>
          )}
          <Link className="button button-plain" to={paths.unit(number)}>
            To No. {unitNumber(number)}
          </Link>
        </div>
      </div>
      {wish && size ? (
        <UnitLabel page={page} shop={shop} wish={wish} size={size} />
      ) : (
        <p className="beside-paper text-ink2">
          {size ? 'Type a price, and the label is drawn here.' : 'Type a size, and the label is drawn here.'}
        </p>
      )}
    </>
  );
}

/** Asks anew which tag a unit has before a label that names it is printed. One without a tag is for parts whatever has come since. */
function useAskWhetherTagIsThis(): (unit: number, shown: string | undefined) => Promise<MayPrint> {
  const client = useQueryClient();
  return async (unit, shown) => {
    try {
      const now = standingTagOf(await client.fetchQuery({ ...unitQuery(unit), staleTime: 0, retry: false }));
      if (now === shown) return { go: true };
      const what = shown === undefined ? `Tag ${now ?? ''} was signed off` : `Tag ${shown} was withdrawn`;
      return { go: false, why: `${what} meanwhile: look at the label, then print again.` };
    } catch (error) {
      return shown === undefined ? { go: true } : { go: false, why: nobodyCanSay(shown, error) };
    }
  };
}
