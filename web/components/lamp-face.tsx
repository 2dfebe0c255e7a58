import type { LampFace } from '../../shared/lamps/face.js';
import { describeFace, faceColumns } from './lamp-face-layout.js';

type LampState = boolean | null;

/** The first row's middle, and from row to row. */
const FIRST_ROW_Y = 56;
const ROW_PITCH = 44;
const UNDER_LAST_ROW = 52;
const WEIGHTS_ABOVE_EDGE = 12;

function LargeLamp({ x, y, colour, state }: { x: number; y: number; colour: string; state: LampState }) {
  if (state === null) return <circle className="lamp-any" cx={x} cy={y} r="11" strokeWidth="1.75" />;
  if (!state) return <circle className="lamp-dark" cx={x} cy={y} r="11" strokeWidth="1.75" />;
  return (
    <g className={`lamp-${colour}`}>
      <circle className="lamp-halo" cx={x} cy={y} r="15" />
      <circle className="lamp-lit" cx={x} cy={y} r="11" strokeWidth="2" />
    </g>
  );
}

function SmallLamp({ x, y, colour, state }: { x: number; y: number; colour: string; state: LampState }) {
  if (state === null) return <circle className="lamp-any" cx={x} cy={y} r="4.6" strokeWidth="1.3" />;
  if (!state) return <circle className="lamp-dark" cx={x} cy={y} r="4.6" strokeWidth="1.3" />;
  return <circle className={`lamp-lit lamp-${colour}`} cx={x} cy={y} r="5" strokeWidth="1.5" />;
}

/** The state of a lamp in a row; `seen` says what a lamp outside the code did in a capture. */
function stateOf(face: LampFace, row: number, lamp: number, seen: Readonly<Record<string, boolean>> | undefined): LampState {
  return face.rows[row]?.lit[lamp] ?? seen?.[face.lamps[lamp]?.id ?? ''] ?? null;
}

/**
 * A code as the technician sees it on the panel: the lamps in panel order, each phase a row, and beside it the sum as text.
 * A lamp outside the code is hatched unless `seen` says what it did.
 */
export function LampFaceFigure({ face, seen }: { face: LampFace; seen?: Readonly<Record<string, boolean>> }) {
  const { lampX, hairlineX, width } = faceColumns(face.lamps);
  const height = FIRST_ROW_Y + ROW_PITCH * (face.rows.length - 1) + UNDER_LAST_ROW;
  return (
    <div className="face-figure">
      <svg
        className="lamp-face"
        width={width}
        height={height}
        viewBox={`0 0 ${width} ${height}`}
        role="img"
        aria-label={describeFace(face)}
      >
        <rect className="plate" x=".75" y=".75" width={width - 1.5} height={height - 1.5} rx="10" />
        {hairlineX.map((x) => (
          <path key={x} className="hairline" d={`M${x} 12V${height - 12}`} />
        ))}
        {face.lamps.map((lamp, index) => {
          const x = lampX[index] ?? 0;
          const used = face.rows.some((row) => lamp.group === 'weighted' && row.lit[index] === true);
          return (
            <g key={lamp.id}>
              <text x={x} y="24">
                {lamp.label}
              </text>
              {face.rows.map((_, at) => (
                <LargeLamp key={at} x={x} y={FIRST_ROW_Y + ROW_PITCH * at} colour={lamp.colour} state={stateOf(face, at, index, seen)} />
              ))}
              {lamp.group === 'weighted' ? (
                <text x={x} y={height - WEIGHTS_ABOVE_EDGE} className={used ? 'weight used' : 'weight'}>
                  {lamp.weight}
                </text>
              ) : (
                <text x={x} y={height - WEIGHTS_ABOVE_EDGE} className="faint">
                  {lamp.group === 'selector' ? 'selector' : 'none'}
                </text>
              )}
            </g>
          );
        })}
        {face.rows.map((row, at) => (
          <text key={at} className="letter" x="20" y={FIRST_ROW_Y + ROW_PITCH * at + 7}>
            {row.letter}
          </text>
        ))}
      </svg>
      <ol className="face-sums" aria-label="Sums">
        {face.rows.map((row, at) => (
          <li key={at}>
            <b className="letter mr-2.5">{row.letter}</b>
            {row.terms.length === 0 ? 'none lit' : row.terms.join(' + ')} = <b>{row.digit}</b>
          </li>
        ))}
      </ol>
    </div>
  );
}

const SMALL_PITCH = 15;
const SMALL_GROUP_GAP = 5;
const SMALL_HEIGHT = 30;

/** A lamp face small enough for a row of a table; the code stands before it as text. */
export function SmallLampFace({ face }: { face: LampFace }) {
  let x = SMALL_PITCH / 2;
  const lampX = face.lamps.map((lamp, index) => {
    const before = face.lamps[index - 1];
    if (before) x += SMALL_PITCH + (before.group === lamp.group ? 0 : SMALL_GROUP_GAP);
    return x;
  });
  const width = x + SMALL_PITCH / 2;
  const rowY = (row: number): number => (SMALL_HEIGHT / (face.rows.length + 1)) * (row + 1) + (row - (face.rows.length - 1) / 2) * 3;
  return (
    <svg
      width={width}
      height={SMALL_HEIGHT}
      viewBox={`0 0 ${width} ${SMALL_HEIGHT}`}
      role="img"
      aria-label={describeFace(face)}
      className="flex-none"
    >
      {face.lamps.map((lamp, index) =>
        face.rows.map((_, at) => (
          <SmallLamp
            key={`${lamp.id} ${at}`}
            x={lampX[index] ?? 0}
            y={rowY(at)}
            colour={lamp.colour}
            state={stateOf(face, at, index, undefined)}
          />
        )),
      )}
    </svg>
  );
}
