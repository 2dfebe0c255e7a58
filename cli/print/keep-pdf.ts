import { rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { filesIn, makeFolder, notWritable, readIfThere, type Home } from '../home.js';
import { isAlive, processSchema, thisProcess } from '../journal/lock.js';
import { parseJson } from '../session.js';

/** PDFs that were printed stay on the bench for a while, so that one can be printed again without the server. */
const KEPT_PDFS = 40;
/** Beside a PDF while it is being printed: who prints it. */
const PRINTING = '.printing';

export interface KeptPdf {
  /** The whole path. */
  file: string;
  /** It was printed, or was not: from now on it may go when it is one of too many. */
  done: () => void;
}

/**
 * Keeps a PDF on this bench under a name that no other has, `print-17-stock-0412-62x29.pdf`, so that what another process prints stays as
 * it is. The number tells which is older, whatever the clock says. What is being printed is never dropped.
 */
export function keepPdf(home: Home, name: string, bytes: Uint8Array): KeptPdf {
  const folder = makeFolder(home.path('paper'));
  for (let number = 1 + Math.max(0, ...filesIn(folder).map(numberOf)); ; number += 1) {
    const file = join(folder, `print-${number}-${name}.pdf`);
    const marker = `${file}${PRINTING}`;
    if (!made(marker, JSON.stringify(thisProcess()))) continue;
    try {
      if (made(file, bytes)) {
        const done = (): void => {
          rmSync(marker, { force: true });
          dropOldest(folder);
        };
        return { file, done };
      }
    } catch (error) {
      rmSync(marker, { force: true });
      throw error;
    }
    rmSync(marker, { force: true });
  }
}

/** Writes a new file; false where there is one of that name. */
function made(file: string, content: string | Uint8Array): boolean {
  try {
    writeFileSync(file, content, { mode: 0o600, flag: 'wx' });
    return true;
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'EEXIST') return false;
    rmSync(file, { force: true });
    throw notWritable(file, error);
  }
}

/** Files of before there were numbers are the oldest. */
const numberOf = (name: string): number => Number(/^print-(\d+)-/.exec(name)?.[1] ?? 0);

function dropOldest(folder: string): void {
  const names = filesIn(folder).sort((one, other) => numberOf(other) - numberOf(one));
  for (const name of names.filter((one) => one.endsWith('.pdf')).slice(KEPT_PDFS)) {
    const file = join(folder, name);
    if (isBeingPrinted(file)) continue;
    rmSync(file, { force: true });
    rmSync(`${file}${PRINTING}`, { force: true });
  }
}

/** A mark that cannot be read yet was made this moment. */
function isBeingPrinted(file: string): boolean {
  const text = readIfThere(`${file}${PRINTING}`);
  if (text === undefined) return false;
  const by = processSchema.safeParse(parseJson(text)).data;
  return by === undefined || isAlive(by);
}
