import { code128, qrcode } from 'bwip-js/node';
import { barsAsked, codeCollector, qrAsked, type Bars, type QrModules } from '../../shared/paper/codes.js';

/** The modules of a QR code. */
export const qrModules = (text: string): QrModules => qrcode(qrAsked(text), codeCollector()).modules;

/** The bars of a Code 128. */
export const code128Bars = (text: string): Bars => code128(barsAsked(text), codeCollector()).bars;
