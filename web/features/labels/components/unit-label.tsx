import type { Shop } from '../../../../shared/api/sessions.js';
import type { UnitPage } from '../../../../shared/api/units.js';
import { priceLabelOf, stockLabelOf } from '../../../../shared/paper/label-content.js';
import { labelPaper, type PriceLabel, type StockLabel } from '../../../../shared/paper/label-paper.js';
import type { LabelSize } from '../../../../shared/paper/sizes.js';
import { unitAddress } from '../../../../shared/paper/unit-address.js';
import { PaperPages, WithPrintedCodes } from '../../../components/paper.js';
import { formatDate, formatMoney, unitNumber } from '../../../lib/format.js';
import type { PrintedCodes } from '../../../lib/printed-codes.js';

/** Which label, and what of it does not stand in the books. */
export type LabelWish = { kind: 'stock'; code: 'qr' | 'bars' } | { kind: 'price'; priceMinor: number; grade: string };

/** A label of a unit as it is printed. */
export function UnitLabel({ page, shop, wish, size }: { page: UnitPage; shop: Shop; wish: LabelWish; size: LabelSize }) {
  return (
    <WithPrintedCodes>
      {(codes) => (
        <PaperPages
          paper={labelPaper(wish.kind === 'stock' ? stockLabel(page, wish.code, codes) : priceLabel(page, shop, wish), size)}
          label={`${wish.kind === 'stock' ? 'Stock' : 'Price'} label of No. ${unitNumber(page.unit.number)} as printed`}
        />
      )}
    </WithPrintedCodes>
  );
}

function stockLabel(page: UnitPage, code: 'qr' | 'bars', codes: PrintedCodes): StockLabel {
  const number = unitNumber(page.unit.number);
  const drawn = { qr: codes.qr(unitAddress(window.location.origin, number)), bars: codes.bars(number), code };
  return stockLabelOf(page, { takenIn: formatDate(page.unit.takenInAt), ...drawn });
}

const priceLabel = (page: UnitPage, shop: Shop, { priceMinor, grade }: LabelWish & { kind: 'price' }): PriceLabel =>
  priceLabelOf(page, { price: formatMoney(priceMinor, shop.currency), grade, shop });
