import { readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';

/**
 * Of the package that this program came in: its package.json lies one level higher in the built program than in the sources.
 * Read without a schema: it is asked for at every start.
 */
export function ownVersion(from = import.meta.dirname): string {
  try {
    const { version } = JSON.parse(readFileSync(join(from, 'package.json'), 'utf8')) as { version?: unknown };
    return typeof version === 'string' ? version : 'unknown';
  } catch {
    const above = dirname(from);
    return above === from ? 'unknown' : ownVersion(above);
  }
}
