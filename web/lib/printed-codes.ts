import { codeCollector, type Bars, type QrModules } from '../../shared/paper/codes.js';

export interface PrintedCodes {
  qr: (text: string) => QrModules;
  bars: (text: string) => Bars;
}

/** What draws the modules of codes. Loaded only where something is printed: the bar code library is larger than the rest of the page. */
export async function loadPrintedCodes(): Promise<PrintedCodes> {
  const { code128, qrcode } = await import('bwip-js/browser');
  return {
    qr: (text) => {
      const options = { bcid: 'qrcode', text, eclevel: 'M', scale: 1 };
      return qrcode(options, codeCollector()).modules;
    },
    bars: (text) => code128({ bcid: 'code128', text, scale: 1 }, codeCollector()).bars,
  };
}
