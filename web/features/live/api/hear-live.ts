import { useEffect, useState, useSyncExternalStore } from 'react';
import { useQueryClient } from '@tanstack/react-query';
import { ME_KEY } from '../../../lib/query-client.js';
import { LiveSource, type LiveView } from '../live-source.js';

/**
 * What goes on at the benches, of one unit or of all, as long as this page is open. `changed` is called when something was written on the
 * books of a unit (undefined: perhaps of any); it should stay the same from one drawing to the next.
 */
export function useLive(unit: number | undefined, changed: (unit: number | undefined) => void): LiveView {
  const client = useQueryClient();
  const [source] = useState(() => new LiveSource(unit, { changed, refused: () => void client.invalidateQueries({ queryKey: ME_KEY }) }));
  useEffect(() => {
    source.start();
    return () => source.stop();
  }, [source]);
  return useSyncExternalStore(
    (listener) => source.subscribe(listener),
    () => source.view,
  );
}
