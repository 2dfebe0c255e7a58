import { useEffect, useRef, type ReactNode } from 'react';
import { useLocation } from 'react-router-dom';

let lastFocusedKey = 'default';

/**
 * The page's heading: names the document, and takes the focus after a navigation so that the new page is read from its beginning.
 * Not on the first load, where the browser begins at the top by itself; not when somebody already works in the page.
 */
export function PageHeading({ title, children, className = '' }: { title: string; children?: ReactNode; className?: string }) {
  const heading = useRef<HTMLHeadingElement>(null);
  const { key } = useLocation();
  useEffect(() => {
    document.title = `${title}. Refettle`;
  }, [title]);
  useEffect(() => {
    if (key === 'default' || key === lastFocusedKey) return;
    lastFocusedKey = key;
    const main = document.getElementById('main');
    const works = main?.contains(document.activeElement) === true && document.activeElement?.matches('input, select, textarea') === true;
    if (!works) heading.current?.focus({ preventScroll: true });
    // Only when the heading appears: a filter in the address changes the key too, and must not take the focus away.
  }, []);
  return (
    <h1 ref={heading} tabIndex={-1} className={className}>
      {children ?? title}
    </h1>
  );
}
