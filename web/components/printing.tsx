import { useState, type ReactNode } from 'react';
import { explain } from './page-states.js';

/** What is on the screen may not hold any more: `why` says what became of it, in words. */
export type MayPrint = { go: true } | { go: false; why: string };

/** Nothing that names a tag is printed while nobody can say whether it stands. */
export const nobodyCanSay = (tag: string, error: unknown): string =>
  `Nobody can say whether tag ${tag} still stands. ${explain(error instanceof Error ? error : new Error()).happened}`;

/** Prints when the faces are there: a browser that prints too early prints in another face. */
async function printPaper(): Promise<void> {
  await document.fonts.ready;
  window.print();
}

/**
 * Printing what is shown. `ask` looks first whether it still holds; while it does, nothing else is printed. `refused` is what came of it
 * where nothing was printed: it stands where it stays when the button goes.
 */
export function usePrinting(ask: () => Promise<MayPrint>): { print: () => void; asking: boolean; refused: ReactNode } {
  const [asking, setAsking] = useState(false);
  const [why, setWhy] = useState<string>();
  const askAndPrint = async (): Promise<void> => {
    setAsking(true);
    setWhy(undefined);
    try {
      const may = await ask();
      if (may.go) await printPaper();
      else setWhy(may.why);
    } finally {
      setAsking(false);
    }
  };
  const refused = (
    <div role="alert">
      {why !== undefined && <p className="my-3 border-2 border-fail bg-fail-ground px-4 py-3 font-bold">Not printed. {why}</p>}
    </div>
  );
  return { print: () => void askAndPrint(), asking, refused };
}
