import { code128, qrcode } from 'bwip-js/node';
import { codeCollector, type Bars, type QrModules } from '../../shared/paper/codes.js';

/** The modules of a QR code of error level M. */
export function qrModules(text: string): QrModules {
  const options = { bcid: 'qrcode', text, eclevel: 'M', scale: 1 };
  return qrcode(options, codeCollector()).modules;
}

/** The bars of a Code 128. */
export const code128Bars = (text: string): Bars => code128({ bcid: 'code128', text, scale: 1 }, codeCollector()).bars;
