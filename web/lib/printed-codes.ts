import { barsAsked, codeCollector, qrAsked, type Bars, type QrModules } from '../../shared/paper/codes.js';

export interface PrintedCodes {
  qr: (text: string) => QrModules;
  bars: (text: string) => Bars;
}

/** What draws the modules of codes. Loaded only where something is printed: the bar code library is larger than the rest of the page. */
export async function loadPrintedCodes(): Promise<PrintedCodes> {
  const { code128, qrcode } = await import('bwip-js/browser');
  return {
    qr: (text) => qrcode(qrAsked(text), codeCollector()).modules,
    bars: (text) => code128(barsAsked(text), codeCollector()).bars,
  };
}
