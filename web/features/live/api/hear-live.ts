import { useEffect, useState, useSyncExternalStore } from 'react';
import { useQueryClient } from '@tanstack/react-query';
import { ME_KEY } from '../../../lib/query-client.js';
import { LiveSource } from '../live-source.js';
import type { LiveWorks } from '../live-state.js';

export interface Live {
  /** Everything is heard as it happens. */
  up: boolean;
  retry: () => void;
  source: LiveSource;
}

const subscribeTo = (source: LiveSource) => (listener: () => void) => source.subscribe(listener);

/**
 * Hears what goes on at the benches, of one unit or of all, as long as this page is open. `changed` is called when something was written on
 * the books of a unit (undefined: perhaps of any); it should stay the same from one drawing to the next. The page is drawn anew when the
 * connection comes or goes; what shows the work asks for it by `useLiveWorks`, many times a second.
 */
export function useLive(unit: number | undefined, changed: (unit: number | undefined) => void): Live {
  const client = useQueryClient();
  const [parts] = useState(() => {
    const source = new LiveSource(unit, { changed, refused: () => void client.invalidateQueries({ queryKey: ME_KEY }) });
    return { source, subscribe: subscribeTo(source), retry: () => source.retry() };
  });
  const { source, subscribe, retry } = parts;
  useEffect(() => {
    source.start();
    return () => source.stop();
  }, [source]);
  const up = useSyncExternalStore(subscribe, () => source.view.up);
  return { up, retry, source };
}

/** The work as it is told. */
export function useLiveWorks({ source }: Live): LiveWorks {
  const [subscribe] = useState(() => subscribeTo(source));
  return useSyncExternalStore(subscribe, () => source.view.works);
}
