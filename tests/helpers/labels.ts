import { code128Bars, qrModules } from '../../cli/render/paper-codes.js';
import type { PriceLabel, StockLabel } from '../../shared/paper/label-paper.js';

export const UNIT_ADDRESS = 'http://shop.millrace.example:4780/units/0412';

/** Labels of an invented machine. */
export const stockLabel = (change: Partial<StockLabel> = {}): StockLabel => ({
  ...{ kind: 'stock', number: '0412', maker: 'Brindle', model: 'BW 714', appliance: 'washing machine', serial: '7143 0968 2251' },
  ...{ takenIn: '5 Mar 2026', licensedOnly: false, qr: qrModules(UNIT_ADDRESS), bars: code128Bars('0412'), code: 'qr' },
  ...change,
});
export const priceLabel = (change: Partial<PriceLabel> = {}): PriceLabel => ({
  ...{ kind: 'price', number: '0412', maker: 'Brindle', model: 'BW 714', appliance: 'washing machine', price: '£129.00', grade: 'B' },
  ...{ tag: '0412-2', shop: { name: 'Millrace Mend', phone: '01632 960412' } },
  ...change,
});
