// The scripts in real shells: what they insert and what they show, for the program as it is built or from its sources.
import { execFile } from 'node:child_process';
import { chmodSync, existsSync, mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { keepUnits } from '../../../cli/bench/kept-units.js';
import { SHELL_SCRIPTS } from '../../../cli/completion/shells.js';
import { shellLine } from '../../../cli/menu/shell-words.js';
import { homeOf } from '../../../cli/home.js';
import { theProgram } from '../../helpers/the-program.js';

const repository = new URL('../../..', import.meta.url).pathname;
const folder = mkdtempSync(join(tmpdir(), 'refettle-shells-'));
const where = (shell: string): string | undefined =>
  ['/bin', '/usr/bin', '/usr/local/bin'].map((each) => join(each, shell)).find((file) => existsSync(file));

beforeAll(() => {
  // `refettle` on the path, as npm links it.
  mkdirSync(join(folder, 'bin'));
  const program = theProgram.map((part) =>
    part === 'tsx' ? import.meta.resolve(part) : part.startsWith('-') ? part : resolve(repository, part),
  );
  writeFileSync(join(folder, 'bin', 'refettle'), `#!/bin/sh\nexec ${shellLine([process.execPath, ...program])} "$@"\n`);
  chmodSync(join(folder, 'bin', 'refettle'), 0o755);
  const row = { stage: 'testing', waitsFor: 'the bench' };
  const units = [
    { ...row, number: 413, plate: { maker: 'Tarnwell', model: 'T 2' } },
    { ...row, number: 412, plate: { maker: 'Brindle', model: 'BW 714' }, family: 'heron-h6' },
  ];
  keepUnits(homeOf({ REFETTLE_HOME: folder }), units, new Date('2026-03-05T09:00:00Z'));
  mkdirSync(join(folder, 'it is'));
  for (const [shell, script] of Object.entries(SHELL_SCRIPTS)) writeFileSync(join(folder, `completion.${shell}`), script);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function shell(file: string, args: readonly string[]): Promise<string> {
  const env = {
    PATH: `${join(folder, 'bin')}:/usr/local/bin:/usr/bin:/bin`,
    LANG: 'C.UTF-8',
    HOME: folder,
    REFETTLE_HOME: folder,
    TERM: 'xterm',
  };
  return new Promise((done, failed) =>
    execFile(file, args, { cwd: folder, env, timeout: 25_000 }, (error, stdout, stderr) => {
      if (error || stderr !== '') failed(error ?? new Error(stderr));
      else done(stdout);
    }),
  );
}

/** What readline sets, and then what it reads. */
const bashAt = (line: string, type = 9): string => `
source completion.bash
COMP_LINE=${shellLine([line])} COMP_POINT=${line.length} COMP_TYPE=${type} COMP_WORDBREAKS=$' \\t\\n"\\'><=;|&(:'
_refettle
printf '%s\\n' "\${COMPREPLY[@]}"`;
const inBash = async (line: string, type?: number): Promise<string[]> =>
  (await shell('/bin/bash', ['--norc', '-c', bashAt(line, type)])).split('\n').slice(0, -1);

describe('bash', () => {
  test.each([
    ['a command', 'refettle un', ['unit']],
    ['a unit', 'refettle unit show 04', ['0413', '0412']],
    ['a value of an option', 'refettle unit list --stage sig', ['signed\\ off']],
    ['the same behind an open quote', 'refettle unit list --stage "sig', ['signed off']],
    ['a word that bash breaks at its colon', 'refettle capture 412 --rig=sim:heron-g', ['heron-good']],
    ['a folder with a blank', 'refettle sheet check it', ['it\\ is/']],
    ['a line that would do harm if it ran', 'refettle unit show `touch harm` $(touch harm', ['']],
  ])('When %s is completed, then it inserts what the program offers', async (_what, line, expected) => {
    expect(await inBash(line)).toEqual(expected);
    expect(existsSync(join(folder, 'harm'))).toBe(false);
  });

  test('When Tab is pressed again, then it shows what each is', async () => {
    expect(await inBash('refettle unit show ', 63)).toEqual(['0413  -- Tarnwell T 2, testing', '0412  -- Brindle BW 714, testing']);
  });

  test('When the script is read by a bash of its own, then it says nothing, and completes refettle', async () => {
    expect(await shell('/bin/bash', ['--norc', '-c', 'source completion.bash; complete -p refettle'])).toBe(
      'complete -F _refettle refettle\n',
    );
  });
});

// Debian's zsh and fish are no needs of the project: where they are, they are asked.
const zsh = where('zsh');
if (zsh !== undefined)
  describe('zsh', () => {
    test('When its script is read, then zsh finds nothing wrong with it', async () => {
      expect(await shell(zsh, ['-f', '-n', 'completion.zsh'])).toBe('');
    });

    // What zsh's own machinery would hand over is set here, and what it would be given is printed.
    const zshAt = (words: readonly string[]): string => `
compdef() { :; }
compadd() { print -rl -- "\${(@P)@[-1]}"; }
source completion.zsh
words=(${shellLine(words)}) CURRENT=${words.length} PREFIX=${shellLine([words.at(-1) ?? ''])}
_refettle`;
    test.each([
      ['a verb', ['refettle', 'unit', 'sh'], ['show']],
      ['units', ['refettle', 'unit', 'show', ''], ['0413', '0412']],
      ['a value behind an equals sign', ['refettle', 'unit', 'list', '--stage=sig'], ['--stage=signed\\ off']],
      ['a folder with a blank', ['refettle', 'sheet', 'check', 'it'], ['it\\ is/']],
    ])('When %s is completed, then zsh is given what the program offers', async (_what, words, expected) => {
      expect((await shell(zsh, ['-f', '-c', zshAt(words)])).split('\n').slice(0, -1)).toEqual(expected);
    });
  });

const fish = where('fish');
if (fish !== undefined)
  describe('fish', () => {
    test.each([
      ['a verb', 'refettle unit sh', ['show\ta unit: plate, stage, what is missing until ready, history']],
      ['a unit', 'refettle unit show 04', ['0413\tTarnwell T 2, testing', '0412\tBrindle BW 714, testing']],
      ['a value behind an equals sign', 'refettle unit list --stage=pro', ['--stage=proving']],
      ['an option', 'refettle unit list --st', ['--stage\tonly units that are there']],
    ])('When %s is completed, then fish offers what the program does', async (_what, line, expected) => {
      const offered = await shell(fish, ['--no-config', '-c', `source completion.fish; complete -C '${line}'`]);
      expect(
        offered
          .split('\n')
          .slice(0, -1)
          .map((each) => each.trimEnd()),
      ).toEqual(expected);
    });
  });
