/** A word of a command line as far as it was typed. */
export interface TypedWord {
  /** What the program would get. */
  text: string;
  /** As it stands on the line, with its quotes and backslashes. */
  raw: string;
  /** The quote that is still open at its end. */
  quote: '"' | "'" | undefined;
}

/** The words of a line up to the cursor; the last one is being typed and may be empty. Nothing of it is ever run or expanded. */
export function typedWords(line: string): TypedWord[] {
  const words: TypedWord[] = [];
  let word: TypedWord | undefined;
  for (let at = 0; at < line.length; at += 1) {
    const sign = line.charAt(at);
    const quote = word?.quote;
    if (quote === undefined && /\s/.test(sign)) {
      if (word) words.push(word);
      word = undefined;
      continue;
    }
    word ??= { text: '', raw: '', quote: undefined };
    word.raw += sign;
    if (sign === '\\' && quote !== "'" && at + 1 < line.length) {
      const next = line.charAt((at += 1));
      word.raw += next;
      // Between double quotes a backslash is one, except before these (POSIX, 2.2.3).
      word.text += quote === '"' && !/["$`\\]/.test(next) ? `\\${next}` : next;
    } else if (sign === quote) word.quote = undefined;
    else if (quote === undefined && (sign === '"' || sign === "'")) word.quote = sign;
    else word.text += sign;
  }
  words.push(word ?? { text: '', raw: '', quote: undefined });
  return words;
}
