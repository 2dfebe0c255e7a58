import './paper.css';
import '@fontsource/jetbrains-mono/latin-ext-400.css';
import '@fontsource/jetbrains-mono/latin-ext-700.css';
import '@fontsource/jetbrains-mono/cyrillic-400.css';
import '@fontsource/jetbrains-mono/cyrillic-700.css';
import '@fontsource/jetbrains-mono/cyrillic-ext-400.css';
import '@fontsource/jetbrains-mono/cyrillic-ext-700.css';
import '@fontsource/jetbrains-mono/vietnamese-400.css';
import '@fontsource/jetbrains-mono/vietnamese-700.css';
import { useEffect, useState, type CSSProperties, type ReactNode } from 'react';
import type { Mark, Paper as PaperData } from '../../shared/paper/pages.js';
import { POINTS_PER_MM, type Face } from '../../shared/paper/type.js';
import { loadPrintedCodes, type PrintedCodes } from '../lib/printed-codes.js';

const READ = 'var(--read)';
const MONO = 'var(--mono)';
const FACES: Record<Face, { family: string; weight: number }> = {
  read: { family: READ, weight: 400 },
  bold: { family: READ, weight: 700 },
  heavy: { family: READ, weight: 800 },
  mono: { family: MONO, weight: 400 },
  monoBold: { family: MONO, weight: 700 },
};

/** As a style: marks of the screen have inks of their own, and a style is stronger. */
const type = (face: Face, points: number, fill: string) => ({
  style: { fontFamily: FACES[face].family, fill },
  fontWeight: FACES[face].weight,
  fontSize: points / POINTS_PER_MM,
});

/** One mark of the paper, in millimetres. A text keeps the width that its layout counts with, whatever face the browser has. */
function MarkOnPaper({ mark }: { mark: Mark }) {
  switch (mark.kind) {
    case 'text':
      return (
        <text
          x={mark.x}
          y={mark.baseline}
          textLength={mark.widthMm}
          lengthAdjust="spacingAndGlyphs"
          {...type(mark.face, mark.points, mark.white ? '#fff' : '#000')}
        >
          {mark.text}
        </text>
      );
    case 'line':
      return <path d={`M${mark.x1} ${mark.y1}L${mark.x2} ${mark.y2}`} stroke="#000" strokeWidth={mark.thick} />;
    case 'rectangles':
      return (
        <path
          d={mark.rectangles.map(({ x, y, width, height }) => `M${x} ${y}h${width}v${height}h${-width}z`).join('')}
          fill="#000"
          shapeRendering="crispEdges"
        />
      );
    case 'frame': {
      const { rectangle, thick } = mark;
      const inset = {
        x: rectangle.x + thick / 2,
        y: rectangle.y + thick / 2,
        width: rectangle.width - thick,
        height: rectangle.height - thick,
      };
      return <rect {...inset} fill="none" stroke="#000" strokeWidth={thick} />;
    }
    case 'shape':
      return (
        <path
          d={mark.path}
          transform={`translate(${mark.x} ${mark.y}) scale(${mark.scale})`}
          fillRule="evenodd"
          fill={mark.thick !== undefined ? 'none' : mark.white ? '#fff' : '#000'}
          {...(mark.thick === undefined ? {} : { stroke: '#000', strokeWidth: mark.thick / mark.scale })}
        />
      );
    case 'circle':
      return (
        <circle
          cx={mark.x}
          cy={mark.y}
          r={mark.radius}
          fill={mark.filled ? '#000' : 'none'}
          stroke="#000"
          strokeWidth={mark.thick}
          {...(mark.dash ? { strokeDasharray: `${mark.dash.on} ${mark.dash.off}` } : {})}
        />
      );
    case 'across':
      return (
        <text
          x={mark.x - mark.widthMm / 2}
          y={mark.y + mark.drop}
          textLength={mark.widthMm}
          transform={`rotate(${mark.degrees} ${mark.x} ${mark.y})`}
          stroke="#000"
          strokeWidth={mark.thick}
          {...type(mark.face, mark.points, 'none')}
        >
          {mark.text}
        </text>
      );
  }
}

/** The pages of a print job, each as large as its paper when it is printed; everything in `beside-paper` stays on the screen. */
export function PaperPages({ paper, label }: { paper: PaperData; label: string }) {
  const [size] = paper.pages;
  return (
    <div className="paper-pages">
      {size && <style>{`@page { size: ${size.widthMm}mm ${size.heightMm}mm; margin: 0 }`}</style>}
      {paper.pages.map(({ widthMm, heightMm, marks }, index) => (
        <svg
          key={index}
          className="paper-page"
          viewBox={`0 0 ${widthMm} ${heightMm}`}
          style={{ '--wide': `${widthMm}mm`, '--high': `${heightMm}mm` } as CSSProperties}
          role="img"
          aria-label={paper.pages.length === 1 ? label : `${label}, page ${index + 1} of ${paper.pages.length}`}
        >
          {marks.map((mark, place) => (
            <MarkOnPaper key={place} mark={mark} />
          ))}
        </svg>
      ))}
    </div>
  );
}

/** Waits for what draws codes, then shows its children with it. */
export function WithPrintedCodes({ children }: { children: (codes: PrintedCodes) => ReactNode }) {
  const [codes, setCodes] = useState<PrintedCodes>();
  const [failed, setFailed] = useState(false);
  useEffect(() => {
    let gone = false;
    loadPrintedCodes().then(
      (loaded) => !gone && setCodes(loaded),
      () => !gone && setFailed(true),
    );
    return () => {
      gone = true;
    };
  }, []);
  if (failed) return <p role="alert">The codes could not be drawn. Load the page again before you print.</p>;
  if (!codes) return <div className="min-h-[60vh]" role="status" aria-busy="true" aria-label="Drawing what is printed" />;
  return children(codes);
}
