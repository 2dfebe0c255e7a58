import type { InputStream } from './prompt.js';

const CTRL_C = '\u0003';
/** How long keys that were pressed too early are thrown away: nobody confirms a caution they have not read. */
const EARLY_KEYS_MS = 40;

export interface Keyboard {
  /** Gives the terminal back as it was. May be called twice. */
  close(): void;
}

/**
 * Reads single keys. The terminal is put into raw mode and given back on every way out, also when the process ends in between.
 * Ctrl-C comes as a call of its own, because raw mode takes the signal away.
 */
export async function readKeys(stdin: InputStream, onKey: (key: string) => void, onCtrlC: () => void): Promise<Keyboard> {
  let open = true;
  let early = true;
  const onData = (chunk: Buffer | string): void => {
    const text = chunk.toString();
    if (text.includes(CTRL_C)) onCtrlC();
    else if (!early) for (const key of splitKeys(text)) if (open) onKey(key);
  };
  const close = (): void => {
    if (!open) return;
    open = false;
    process.off('exit', close);
    stdin.off('data', onData);
    stdin.setRawMode?.(false);
    stdin.pause();
  };
  process.on('exit', close);
  stdin.setRawMode?.(true);
  stdin.on('data', onData);
  stdin.resume();
  await new Promise((resolve) => setTimeout(resolve, EARLY_KEYS_MS));
  early = false;
  return { close };
}

/** An arrow or function key is one key of several characters; it means nothing here, but must not be taken for its letters. */
function splitKeys(text: string): string[] {
  // eslint-disable-next-line no-control-regex -- ESC begins what such a key sends
  return text.match(/\u001b(?:\[[0-9;]*[A-Za-z~]|O.|.)?|./gsu) ?? [];
}
