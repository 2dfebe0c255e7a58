import { useEffect, useState } from 'react';

/** Modules of quiet on each side (ISO/IEC 18004 asks for 4). The library draws a module 2 units wide and counts padding in units. */
const QUIET_UNITS = 8;
const UNITS_PER_MODULE = 2;
/** Least module that a 203 dpi printer draws clearly: 4 dots. */
const MODULE_MM = 0.5;

interface Drawn {
  url: string;
  widthMm: number;
}

async function draw(text: string): Promise<Drawn> {
  // Loaded only here: the barcode library is larger than the rest of the page.
  const { drawingSVG, qrcode } = await import('bwip-js/browser');
  const options = { bcid: 'qrcode', text, eclevel: 'M', scale: 1, paddingwidth: QUIET_UNITS, paddingheight: QUIET_UNITS };
  const svg = qrcode(options, drawingSVG());
  const units = Number(/viewBox="0 0 (\d+)/.exec(svg)?.[1] ?? 0);
  return { url: `data:image/svg+xml,${encodeURIComponent(svg)}`, widthMm: (units / UNITS_PER_MODULE) * MODULE_MM };
}

/** The QR code of an address, in the size that a label printer prints clearly. */
export function QrCode({ text, alt }: { text: string; alt: string }) {
  const [drawn, setDrawn] = useState<Drawn>();
  const [failed, setFailed] = useState(false);
  useEffect(() => {
    let gone = false;
    draw(text).then(
      (result) => !gone && setDrawn(result),
      () => !gone && setFailed(true),
    );
    return () => {
      gone = true;
    };
  }, [text]);
  if (failed) return <p>The QR code could not be drawn. Load the page again before you print.</p>;
  if (!drawn) return <div className="h-[27mm] w-[27mm]" role="status" aria-busy="true" aria-label="Drawing the QR code" />;
  return <img src={drawn.url} alt={alt} style={{ width: `${drawn.widthMm}mm`, height: `${drawn.widthMm}mm` }} className="tag-qr" />;
}
