// Printing with a made-up `lp` on PATH: what it is told, and what is said when it fails, hangs or is not there.
import { chmodSync, existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, utimesSync, writeFileSync } from 'node:fs';
import { hostname, tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest';
import { keepPdf } from '../../../cli/print/keep-pdf.js';
import { putOnPaper } from '../../../cli/print/put-on-paper.js';
import { printCommand } from '../../../cli/print/print-command.js';
import { runProgram } from '../../../cli/program.js';
import { labelPaper } from '../../../shared/paper/label-paper.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { stockLabel } from '../../helpers/labels.js';
import { pageSizes } from '../../helpers/read-paper.js';

/** Where a child that was left behind notes its number. */
const LEFT = 'lp.left';
let folder: string;
let bench: BenchTerminal;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-print-'));
});
afterEach(() => {
  bench.remove();
  if (existsSync(join(folder, LEFT))) process.kill(Number(pidIn(LEFT)), 'SIGKILL');
  rmSync(folder, { recursive: true, force: true });
});

/** A program of this name that notes its words, one a line, and then does what `does` says. */
function program(name: string, does: string): void {
  const file = join(folder, name);
  writeFileSync(file, `#!/bin/sh\nfor word in "$@"; do printf '%s\\n' "$word" >> '${folder}/told'; done\n${does}\n`);
  chmodSync(file, 0o755);
}
const told = (): string[] => readFileSync(join(folder, 'told'), 'utf8').trimEnd().split('\n');
/** A line of the made-up program: a child in a session of its own, with the program's pipes, that outlives every test unless it is ended. */
const leavesBehind = `setsid sh -c 'echo $$ > "$1"; exec sleep 300' sh "$0.left" & while [ ! -s "$0.left" ]; do sleep 0.01; done`;
const pidIn = (name: string): string => readFileSync(join(folder, name), 'utf8').trim();
/** Neither gone, nor dead and not yet fetched. */
const lives = (name: string): boolean => {
  const stat = `/proc/${pidIn(name)}/stat`;
  return existsSync(stat) && readFileSync(stat, 'utf8').split(' ')[2] !== 'Z';
};
const paper = labelPaper(stockLabel(), { width: 62, height: 29 });

function print(options: { printer?: string; pdf?: string } = {}, env: Record<string, string> = {}) {
  bench = benchTerminal({ env: { PATH: `${folder}:/usr/bin:/bin`, ...env } });
  const order = { paper, name: 'stock-0412-62x29', options: { print: true, ...options }, what: 'the stock label is', size: '62 x 29 mm' };
  return putOnPaper(order, bench.context);
}
const kept = (): string => join(bench.home, 'paper', 'print-1-stock-0412-62x29.pdf');

describe('Printing', () => {
  test('When the printer takes it, then its job is said, and lp was told the size and not to scale', async () => {
    program('lp', "echo 'request id is bench-label-17 (1 file(s))'");
    const put = await print({ printer: 'bench-label' });
    expect(put).toEqual({ code: 0, answer: { pdf: kept(), printed: { done: true, job: 'bench-label-17' } } });
    expect(bench.stderr()).toBe('The stock label is at the printer: job bench-label-17.\n');
    expect(told()).toEqual([
      '-d',
      'bench-label',
      '-t',
      'Stock label 0412',
      '-o',
      'media=Custom.62x29mm',
      '-o',
      'print-scaling=none',
      kept(),
    ]);
    expect(pageSizes(readFileSync(kept()))).toHaveLength(1);
  });

  test('When the print fails, then it says so with what lp said, exits 4, and names the PDF that is kept', async () => {
    program('lp', "echo 'lp: Error - The printer or class does not exist.' >&2; exit 1");
    const put = await print({ printer: 'nowhere' });
    expect(put.code).toBe(4);
    expect(bench.stderr()).toContain('Not printed: lp ended with 1: lp: Error - The printer or class does not exist.');
    expect(bench.stderr()).toContain(`Nothing is lost: the PDF is in ${kept()}`);
    expect(readFileSync(kept()).subarray(0, 5).toString()).toBe('%PDF-');
  });

  test('When lp hangs, then it is ended with all it started, and the words say that it may be printed all the same', async () => {
    program('lp', `sleep 30 & echo $! > '${folder}/child'; ${leavesBehind}; sleep 30`);
    const put = await print({}, { REFETTLE_PRINT_SECONDS: '1' });
    expect(put.code).toBe(4);
    expect(bench.stderr()).toMatch(/Not printed: lp gave no answer in 1 s\. It may be printed all the same/);
    expect(existsSync(kept())).toBe(true);
    expect(lives('child')).toBe(false);
    // What left its group goes its own way: it has the pipes still, and is not waited for.
    expect(lives(LEFT)).toBe(true);
  });

  test('When lp ends and leaves something behind that keeps its pipes, then its end counts', async () => {
    program('lp', `${leavesBehind}; echo 'request id is bench-label-18 (1 file(s))'`);
    const put = await print();
    expect(put).toMatchObject({ code: 0, answer: { printed: { done: true, job: 'bench-label-18' } } });
    expect(lives(LEFT)).toBe(true);
  });

  test('When there is no lp, then it says how to get it, exits 4, and the PDF is kept', async () => {
    const put = await print({}, { PATH: folder });
    expect(put.code).toBe(4);
    expect(bench.stderr()).toMatch(/there is no program lp on this machine\. Install it \(apt-get install cups-client\), or name another/);
    expect(existsSync(kept())).toBe(true);
  });

  test('When Ctrl-C is pressed while it prints, then it ends with 130 and the PDF is kept', async () => {
    program('lp', 'sleep 30');
    const printing = print();
    await vi.waitFor(() => expect(existsSync(join(folder, 'told'))).toBe(true), 20_000);
    bench.context.interruption.interrupt();
    expect((await printing).code).toBe(130);
    expect(existsSync(kept())).toBe(true);
  });

  test('When a file was asked for too, then that one is printed', async () => {
    program('lp', "echo 'request id is x-1 (1 file(s))'");
    const pdf = join(folder, 'mine.pdf');
    await print({ pdf });
    expect(told().at(-1)).toBe(pdf);
    expect(bench.stderr()).toContain(`The stock label is in ${pdf}: 62 x 29 mm, print it at 100 %.`);
  });

  test('When the same label is printed twice, then the first PDF stays as it is', async () => {
    program('lp', 'exit 0');
    const home = mkdtempSync(join(folder, 'home-'));
    const first = await print({}, { REFETTLE_HOME: home });
    const bytes = readFileSync(first.answer.pdf ?? '');
    const again = { paper: labelPaper(stockLabel({ number: '0413' }), { width: 62, height: 29 }), name: 'stock-0412-62x29' };
    const second = await putOnPaper({ ...again, options: { print: true }, what: 'the stock label is', size: '62 x 29 mm' }, bench.context);
    expect(second.answer.pdf).not.toBe(first.answer.pdf);
    expect(readFileSync(first.answer.pdf ?? '')).toEqual(bytes);
  });

  test('When many are printed, then the oldest PDFs are dropped, never what is being printed, whatever the clock says', () => {
    bench = benchTerminal();
    const paper = join(bench.home, 'paper');
    mkdirSync(paper);
    for (let count = 0; count < 45; count += 1) writeFileSync(join(paper, `of-before-${count}.pdf`), '');
    const bytes = Buffer.from('%PDF-');
    const mine = keepPdf(bench.context.home, 'tag-0412-2-a6', bytes);
    const dead = keepPdf(bench.context.home, 'tag-0412-3-a6', bytes);
    // A process that is gone: no Linux gives out a number above 2^22 (proc(5), pid_max).
    writeFileSync(`${dead.file}.printing`, JSON.stringify({ pid: 2 ** 22 + 1, host: hostname() }));
    const newest = Array.from({ length: 41 }, () => {
      const kept = keepPdf(bench.context.home, 'stock-0412-62x29', bytes);
      // The clock was set back.
      utimesSync(kept.file, 0, 0);
      kept.done();
      return kept.file;
    });
    expect(
      readdirSync(paper)
        .map((name) => join(paper, name))
        .sort(),
    ).toEqual([mine.file, `${mine.file}.printing`, ...newest.slice(1)].sort());
    mine.done();
    expect(existsSync(mine.file)).toBe(false);
    expect(readdirSync(paper)).toHaveLength(40);
  });
});

describe('The print command', () => {
  const order = { file: '/home/x/a $(touch b); c.pdf', title: 'T', size: { widthMm: 105, heightMm: 148 } };

  test('When REFETTLE_PRINT is set, then its words are kept apart, and no shell sees a file name or printer', async () => {
    expect(await printCommand(order, { REFETTLE_PRINT: 'lpr -r' })).toEqual({ program: 'lpr', words: ['-r', order.file] });
    const filled = await printCommand(
      { ...order, printer: 'desk' },
      { REFETTLE_PRINT: '/opt/my\\ tools/print --to={printer} {file} --now' },
    );
    expect(filled).toEqual({ program: '/opt/my tools/print', words: ['--to=desk', order.file, '--now'] });
    program('print-it', 'exit 0');
    await print({ pdf: join(folder, 'a; touch owned') }, { REFETTLE_PRINT: 'print-it $(touch${IFS}owned) ; touch owned' });
    expect(told()).toEqual(['$(touch${IFS}owned)', ';', 'touch', 'owned', join(folder, 'a; touch owned')]);
    expect(existsSync('owned')).toBe(false);
  });

  test('When the paper has a name, then lp is told the name', async () => {
    bench = benchTerminal();
    expect((await printCommand(order, {})).words).toContain('media=A6');
    expect((await printCommand({ ...order, size: { widthMm: 210, heightMm: 297 } }, {})).words).toContain('media=A4');
    expect((await printCommand({ ...order, size: { widthMm: 101.6, heightMm: 152.4 } }, {})).words).toContain('media=Custom.101.6x152.4mm');
  });

  test('When a printer is an option, two words, or nowhere to go, then that is wrong usage', async () => {
    bench = benchTerminal();
    for (const printer of ['-o', '', 'a b', 'x;y', '$(x)'])
      await expect(printCommand({ ...order, printer }, {})).rejects.toThrow(/no printer's name/);
    await expect(printCommand({ ...order, printer: 'desk' }, { REFETTLE_PRINT: 'lpr' })).rejects.toThrow(/\{printer\}/);
    await expect(printCommand(order, { REFETTLE_PRINT: 'lpr -P {printer}' })).rejects.toThrow(/--printer NAME/);
  });

  test.each([
    [['label', '0412'], /--print, or --pdf FILE/],
    [['label', '0412', '--kind', 'price', '--print'], /--price 129\.00/],
    [['label', '0412', '--price', '5', '--print'], /has no price/],
    [['label', '0412', '--size', '10x10', '--print'], /no size of a label/],
    [['label', '0412', '--format', '1x1', '--print'], /62x29/],
    [['label', '0412', '--kind', 'price', '--price', '5', '--grade', 'far too long a grade', '--print'], /--grade/],
    [['label', '0412', '--pdf', 'x.pdf', '--printer', 'desk'], /add --print/],
    [['tag', '0412', '--printer', 'desk'], /add --print/],
    [['tag', '0412', '--format', 'a5', '--print'], /a6/],
    [['tag', '--print'], /missing required argument/],
  ])('When %j is typed, then it is wrong usage and nothing is asked of the server', async (args, says) => {
    bench = benchTerminal();
    expect(await runProgram(args, bench.context)).toBe(2);
    expect(bench.stdout()).toBe('');
    expect(bench.stderr()).toMatch(says);
  });
});
