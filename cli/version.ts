import { readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { z } from 'zod';

/** Of the package that this program came in: its package.json lies one level higher in the built program than in the sources. */
export function ownVersion(from = import.meta.dirname): string {
  try {
    return z.object({ version: z.string() }).parse(JSON.parse(readFileSync(join(from, 'package.json'), 'utf8'))).version;
  } catch {
    const above = dirname(from);
    return above === from ? 'unknown' : ownVersion(above);
  }
}
