export type TagLook = 'open' | 'ready' | 'withdrawn' | 'sold';

const OUTLINE = 'M10 1H71V29H10L1 20V10z';
const STUB = 'M9 1H30l-3 4.7 3 4.7-3 4.6 3 4.7-3 4.6 3 4.7H9L1 21V9z';
const FIRST_BAR_X = 20;
const BARS_END_X = 67;
/** Of a bar and the blank after it, this much is bar. */
const BAR_SHARE = 0.66;

/** A unit's standing as the silhouette of its tag: one bar a rule that is met, blanks for the rest. The count stands beside it as text. */
export function SmallTag({ look, met, total }: { look: TagLook; met: number; total: number }) {
  const pitch = (BARS_END_X - FIRST_BAR_X) / Math.max(1, total);
  return (
    <svg width="72" height="30" viewBox="0 0 72 30" aria-hidden="true" className="flex-none">
      <path
        d={look === 'sold' ? STUB : OUTLINE}
        fill={look === 'ready' ? 'var(--ink)' : look === 'sold' ? 'none' : 'var(--sheet)'}
        stroke="var(--ink)"
        strokeWidth="1.75"
      />
      <circle
        cx="10"
        cy="15"
        r="3.4"
        fill={look === 'ready' ? 'var(--enamel)' : 'none'}
        stroke="var(--ink)"
        strokeWidth={look === 'ready' ? 0 : 1.5}
      />
      {look === 'ready' && (
        <text x="44" y="20" textAnchor="middle" fontSize="14" fontWeight="700" className="fill-sheet!">
          ready
        </text>
      )}
      {look === 'withdrawn' && <path d="M18 25 68 5" stroke="var(--ink)" strokeWidth="3" />}
      {look === 'open' &&
        Array.from({ length: total }, (_, rule) => {
          const x = FIRST_BAR_X + rule * pitch;
          return rule < met ? (
            <rect key={rule} x={x} y="8" width={pitch * BAR_SHARE} height="14" fill="var(--ink)" />
          ) : (
            <path key={rule} d={`M${x} 21.2h${pitch * BAR_SHARE}`} stroke="var(--edge)" strokeWidth="1.6" />
          );
        })}
    </svg>
  );
}
