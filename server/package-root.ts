import { existsSync } from 'node:fs';
import { dirname, join } from 'node:path';

/** The sources and dist lie at different depths: the folder with package.json is what both have in common. */
function findPackageRoot(from: string): string {
  if (existsSync(join(from, 'package.json'))) return from;
  const above = dirname(from);
  if (above === from) throw new Error('No package.json above the server: is the checkout complete?');
  return findPackageRoot(above);
}

/** Absolute. */
export const packageRoot = findPackageRoot(import.meta.dirname);
