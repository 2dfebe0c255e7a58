import { readdirSync } from 'node:fs';
import { homedir } from 'node:os';
import { join } from 'node:path';

/** The files and folders that begin like the path that is typed; folders end in `/`. `endings`: `*` for any. */
export function fileNames(typed: string, endings: readonly string[]): string[] {
  const [folder = '', begin = ''] = /\//.test(typed)
    ? [typed.slice(0, typed.lastIndexOf('/') + 1), typed.slice(typed.lastIndexOf('/') + 1)]
    : ['', typed];
  const place = folder.startsWith('~/') ? join(homedir(), folder.slice(2)) : folder || '.';
  const fits = (name: string): boolean => endings.includes('*') || endings.some((ending) => name.toLowerCase().endsWith(`.${ending}`));
  try {
    return readdirSync(place, { withFileTypes: true })
      .filter(({ name }) => name.startsWith(begin) && (begin !== '' || !name.startsWith('.')))
      .flatMap((entry) => {
        // A link may be either: it is offered as it is.
        if (entry.isDirectory()) return [`${folder}${entry.name}/`];
        return fits(entry.name) ? [`${folder}${entry.name}`] : [];
      })
      .sort();
  } catch {
    return [];
  }
}
