import { expect, test } from 'vitest';
import { colourLevelOf, isUtf8, outputOn } from '../../cli/output.js';
import { toAscii } from '../../cli/render/ascii.js';
import { verdictText } from '../../cli/render/verdict.js';

// no-color.org: NO_COLOR counts when it is set and not empty. POSIX 8.2: LC_ALL before LC_CTYPE before LANG.
test.each([
  [true, {}, 1],
  [true, { NO_COLOR: '1' }, 0],
  [true, { NO_COLOR: '' }, 1],
  [true, { TERM: 'dumb' }, 0],
  [false, {}, 0],
] as const)('When the stream is a terminal: %s, and the environment %j, then the colour level is %i', (isTerminal, env, level) => {
  expect(colourLevelOf(isTerminal, env)).toBe(level);
});

test.each([
  [{ LANG: 'en_GB.UTF-8' }, true],
  [{ LANG: 'C.utf8' }, true],
  [{ LANG: 'en_GB.UTF-8', LC_ALL: 'C' }, false],
  [{ LC_CTYPE: 'C.UTF-8', LANG: 'C' }, true],
  [{}, false],
])('When the locale is %j, then it is UTF-8: %s', (env, answer) => {
  expect(isUtf8(env)).toBe(answer);
});

test('When the locale is not UTF-8, then verdicts and units have plain letters and nothing else is lost', () => {
  // Signs: look/tokens, Terminal.
  expect(toAscii('■ pass  ✕ fail  ◧ inconclusive')).toBe('[=] pass  [x] fail  [/] inconclusive');
  expect(toAscii('0.084 Ω ±0.007')).toBe('0.084 ohm +/-0.007');
  expect(toAscii('Zoë 漢')).toBe('Zoe ?');
});

test('When a verdict is shown with and without colour, then sign and word are the same', async () => {
  const written: string[] = [];
  const on = (isTTY: boolean) => outputOn({ isTTY, write: (text: string) => written.push(text) }, { LANG: 'C.UTF-8' });
  const [terminal, pipe] = [await on(true).style(), await on(false).style()];
  expect(verdictText('fail', pipe)).toBe('✕ fail');
  expect(verdictText('fail', terminal)).toBe('\u001b[31m✕ fail\u001b[39m');
  expect(verdictText('not done', pipe)).toBe('_ not done');
  expect(verdictText('inconclusive', { ...pipe, unicode: false })).toBe('[/] inconclusive');
});

test('When JSON is written in a locale without UTF-8, then it stays as it is', () => {
  const written: string[] = [];
  outputOn({ write: (text: string) => written.push(text) }, { LANG: 'C' }).writeExactly('{"unit":"Ω"}');
  expect(written).toEqual(['{"unit":"Ω"}']);
});

test('When a sentence is longer than the terminal is wide, then it breaks between words; into a pipe it goes whole', () => {
  const [terminal, pipe]: string[][] = [[], []];
  const sentence = 'A safety gate is shut: insulation is not done.';
  outputOn({ isTTY: true, columns: 31, write: (text: string) => terminal?.push(text) }, { LANG: 'C.UTF-8' }).say(sentence);
  outputOn({ columns: 31, write: (text: string) => pipe?.push(text) }, { LANG: 'C.UTF-8' }).say(sentence);
  expect(terminal).toEqual(['A safety gate is shut:\ninsulation is not done.\n']);
  expect(pipe).toEqual([`${sentence}\n`]);
});
