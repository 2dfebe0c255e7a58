import type { Shop } from '../api/sessions.js';
import type { UnitPage } from '../api/units.js';
import { unitNumberText } from '../unit-number.js';
import type { PriceLabel, StockLabel } from './label-paper.js';

/**
 * What a unit's stock label says. Codes and the day are handed in: whoever prints draws codes and writes days in its own way.
 *
 * @example stockLabelOf(page, { takenIn: '5 Mar 2026', qr, bars, code: 'qr' }).number // '0412'
 */
export function stockLabelOf({ unit }: Pick<UnitPage, 'unit'>, drawn: Pick<StockLabel, 'takenIn' | 'qr' | 'bars' | 'code'>): StockLabel {
  const { maker, model, serial } = unit.plate;
  const { appliance, licensedOnly } = unit;
  return { kind: 'stock', number: unitNumberText(unit.number), maker, model, appliance, serial, licensedOnly, ...drawn };
}

/**
 * What a unit's price label says: with the number of its tag only while that stands, as `page` knows it. `price` is in words, with its
 * currency; a grade of blanks is none. Assumes that the page was asked for just now where it has a tag that stands.
 *
 * @example priceLabelOf(page, { price: '£129.00', grade: 'B', shop }).tag // '0412-2'
 */
export function priceLabelOf(
  page: Pick<UnitPage, 'unit' | 'tag'>,
  { price, grade, shop }: { price: string; grade?: string | undefined; shop: Pick<Shop, 'name' | 'phone'> },
): PriceLabel {
  const { unit } = page;
  const { maker, model } = unit.plate;
  return {
    ...{ kind: 'price', number: unitNumberText(unit.number), maker, model, appliance: unit.appliance, price },
    grade: grade?.trim() === '' ? undefined : grade?.trim(),
    tag: standingTagOf(page),
    shop: { name: shop.name, phone: shop.phone },
  };
}

/**
 * The number of the tag that stands, as a unit's page knows it; undefined where none does.
 *
 * @example standingTagOf({ tag: { number: '0412-2', standing: 'withdrawn', … } }) // undefined
 */
export const standingTagOf = ({ tag }: Pick<UnitPage, 'tag'>): string | undefined => (tag?.standing === 'stands' ? tag.number : undefined);
