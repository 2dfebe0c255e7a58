import type { ReactNode } from 'react';

/** A tag as a buyer sees it: solid ink while it stands; an outline struck through when it was withdrawn. */
export function TagStanding({
  stands,
  heading,
  sample,
  children,
}: {
  stands: boolean;
  heading: ReactNode;
  sample: boolean;
  children: ReactNode;
}) {
  return (
    <section className={`paper-tag px-5 pt-16 pb-5 ${stands ? 'paper-tag-solid text-enamel' : ''}`} aria-label="Standing">
      <span className="tag-hole" aria-hidden="true" />
      {!stands && (
        <svg className="struck-through" viewBox="0 0 100 100" preserveAspectRatio="none" aria-hidden="true">
          <path d="M3 97 97 3" vectorEffect="non-scaling-stroke" strokeWidth="3" opacity=".25" />
        </svg>
      )}
      {sample && (
        <p className="mb-2 inline-block border-2 border-current px-2 py-1 font-mono text-[15px] font-bold">SAMPLE, from a demo shop</p>
      )}
      {heading}
      <div className="mt-2">{children}</div>
    </section>
  );
}
