import { useEffect, useState } from 'react';

/** A short break is nobody's business: a server is started anew, a tablet changes its access point. */
const SAY_SO_AFTER_MS = 4_000;

/** The connection has been away for longer than that. */
export function useIsDown(up: boolean): boolean {
  const [down, setDown] = useState(false);
  useEffect(() => {
    if (up) {
      setDown(false);
      return;
    }
    const timer = setTimeout(() => setDown(true), SAY_SO_AFTER_MS);
    return () => clearTimeout(timer);
  }, [up]);
  return down;
}
