import { describe, expect, test } from 'vitest';
import { code128Bars, qrModules } from '../../../cli/render/paper-codes.js';
import { priceLabelOf, standingTagOf, stockLabelOf } from '../../../shared/paper/label-content.js';
import { UNIT_ADDRESS } from '../../helpers/labels.js';
import { unitOnTheBench } from '../../helpers/unit-on-bench.js';

const { page } = unitOnTheBench();
const signedOffAt = '2026-03-05T15:10:00Z';
const stands = { ...page, tag: { number: '0412-2', standing: 'stands', signedOffAt } } as const;
const withdrawn = { ...page, tag: { ...stands.tag, standing: 'withdrawn' } } as const;
const shop = { name: 'Millrace Mend', phone: '01632 960412' };

describe('What a label says', () => {
  test('When a tag was withdrawn, then no price label names it', () => {
    expect(standingTagOf(stands)).toBe('0412-2');
    expect(standingTagOf(withdrawn)).toBeUndefined();
    expect(priceLabelOf(stands, { price: '£129.00', shop }).tag).toBe('0412-2');
    expect(priceLabelOf(withdrawn, { price: '£129.00', shop }).tag).toBeUndefined();
  });

  test('When a grade is nothing but blanks, then the label has none', () => {
    expect(priceLabelOf(page, { price: '£129.00', grade: '  ', shop }).grade).toBeUndefined();
    expect(priceLabelOf(page, { price: '£129.00', grade: ' B ', shop }).grade).toBe('B');
  });

  test('When a stock label is made, then it has what stands in the books and the codes it was given', () => {
    const drawn = { takenIn: '3 Mar 2026', qr: qrModules(UNIT_ADDRESS), bars: code128Bars('0412'), code: 'bars' } as const;
    const { plate, appliance, licensedOnly } = page.unit;
    expect(stockLabelOf(page, drawn)).toEqual({
      ...{ kind: 'stock', number: '0412', maker: plate.maker, model: plate.model, serial: plate.serial, appliance, licensedOnly },
      ...drawn,
    });
  });
});
