/** Nothing in such a word means anything to a shell. */
const PLAIN = /^[\w@%+=:,./-]+$/;

/** A command line that a shell (POSIX, 2.2.2) takes apart into just these words. */
export function shellLine(words: readonly string[]): string {
  return words.map((word) => (PLAIN.test(word) ? word : `'${word.replaceAll("'", `'\\''`)}'`)).join(' ');
}
