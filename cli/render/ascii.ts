/** What stands for a sign where the locale has no UTF-8. Signs that stand in columns keep their width of one. */
const PLAIN: Readonly<Record<string, string>> = {
  '■ ': '[=] ',
  '✕ ': '[x] ',
  '◧ ': '[/] ',
  '■': '[=]',
  '✕': '[x]',
  '◧': '[/]',
  '●': '*',
  '○': 'o',
  Ω: 'ohm',
  µ: 'u',
  '°': ' deg ',
  '±': '+/-',
  '×': 'x',
  '−': '-',
  '’': "'",
  '…': '...',
  '→': '->',
  '↓': 'v',
  '▼': 'V',
  '◀': '<',
  '▶': '>',
  '─': '-',
  '━': '=',
  '│': '|',
  '┃': '|',
  '┐': '.',
  '┘': "'",
  '└': "'",
  '╱': '/',
  '╲': '\\',
  '£': 'GBP ',
  '€': 'EUR ',
  '▁': '_',
  '▂': '.',
  '▃': '.',
  '▄': '-',
  '▅': '-',
  '▆': '=',
  '▇': '#',
  '█': '#',
};
const BEYOND_ASCII = /[\u0080-\u{10ffff}]/u;
const EACH_BEYOND_ASCII = /[\u0080-\u{10ffff}]/gu;
const SIGNS = new RegExp(Object.keys(PLAIN).join('|'), 'gu');

/**
 * Text for a terminal whose locale is not UTF-8: every sign of ours has plain letters, an accent is dropped, anything else is a question mark.
 *
 * @example toAscii('■ pass 0.084 Ω') // '[=] pass 0.084 ohm'
 */
export function toAscii(text: string): string {
  if (!BEYOND_ASCII.test(text)) return text;
  return text
    .replace(SIGNS, (sign) => PLAIN[sign] ?? '?')
    .normalize('NFD')
    .replace(/\p{M}/gu, '')
    .replace(EACH_BEYOND_ASCII, '?');
}
