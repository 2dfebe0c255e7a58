import { useEffect, useState } from 'react';

/** A short break is nobody's business: a server is started anew, a tablet changes its access point. */
const SAY_SO_AFTER_MS = 4_000;

/** Says that what is shown may be old. */
export function LiveConnection({ up }: { up: boolean }) {
  const [shown, setShown] = useState(false);
  useEffect(() => {
    if (up) {
      setShown(false);
      return;
    }
    const timer = setTimeout(() => setShown(true), SAY_SO_AFTER_MS);
    return () => clearTimeout(timer);
  }, [up]);
  return (
    <p role="status" className={shown ? 'my-3 border-l-[7px] border-edge py-1 pl-3' : 'sr-only'}>
      {shown ? 'The live connection is interrupted; it comes back by itself. Until then this page looks every few seconds.' : ''}
    </p>
  );
}
