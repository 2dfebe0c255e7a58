import type { ReactNode } from 'react';

/** Stands before what can hurt, and cannot be dismissed. */
export function Caution({ word = 'Caution', children, className = '' }: { word?: string; children: ReactNode; className?: string }) {
  return (
    <div className={`caution ${className}`}>
      <b className="caution-word">
        <svg viewBox="0 0 24 22" aria-hidden="true">
          <path fill="currentColor" fillRule="evenodd" d="M12 0 24 22H0zM10.6 7.5h2.8v7.2h-2.8zM10.6 16.4h2.8v2.8h-2.8z" />
        </svg>
        {word}
      </b>
      <div>{children}</div>
    </div>
  );
}
