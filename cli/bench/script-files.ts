import { existsSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { filesIn, readIfThere, type Home } from '../home.js';

/** A bench script that can be run by its name. */
export interface ScriptFile {
  name: string;
  file: string;
}

const SCRIPT_FILE = /\.ya?ml$/i;
/** The first line that counts of every bench script; a sheet in the same folder is none. */
const IS_SCRIPT = /^format:\s*['"]?refettle\.script['"]?\s*(#.*)?$/m;

/** Where bench scripts live: the bench's own first, then those that come with the program (the demo shop's). */
export function scriptFolders(home: Home): string[] {
  return [home.path('scripts'), join(packageRoot(), 'server', 'seed', 'shop')];
}

/** Every script of those folders, by name; a bench's own stands before one of the same name that came with the program. */
export function scriptFiles(home: Home): ScriptFile[] {
  const found = new Map<string, ScriptFile>();
  for (const folder of scriptFolders(home))
    for (const entry of filesIn(folder).filter((each) => SCRIPT_FILE.test(each))) {
      const name = basename(entry).replace(SCRIPT_FILE, '');
      const file = join(folder, entry);
      if (!found.has(name) && IS_SCRIPT.test(readIfThere(file) ?? '')) found.set(name, { name, file });
    }
  return [...found.values()].sort((a, b) => a.name.localeCompare(b.name));
}

/** `h6-find` is the script of that name, where no file of that name lies here; what is neither stays as it was given. */
export function scriptFileOf(home: Home, given: string): string {
  if (existsSync(given)) return given;
  return scriptFiles(home).find(({ name }) => name === given)?.file ?? given;
}

/** The folder with the program's package.json: one level higher in the built program than in the sources. */
function packageRoot(): string {
  let folder = dirname(fileURLToPath(import.meta.url));
  while (!existsSync(join(folder, 'package.json')) && dirname(folder) !== folder) folder = dirname(folder);
  return folder;
}
