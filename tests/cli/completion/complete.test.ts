import { mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Command } from 'commander';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { keepUnits } from '../../../cli/bench/kept-units.js';
import { complete } from '../../../cli/completion/complete.js';
import { fileNames } from '../../../cli/completion/file-names.js';
import { typedWords } from '../../../cli/completion/typed-line.js';
import { valuesOn } from '../../../cli/completion/values.js';
import { createProgram } from '../../../cli/program.js';
import { applianceSchema, newUnitSchema, ratingPlateSchema } from '../../../shared/api/units.js';
import { stageSchema } from '../../../shared/readiness/stage.js';
import { readSheet } from '../../../shared/sheet/read-sheet.js';
import { verdictSchema } from '../../../shared/verdict.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';

let bench: BenchTerminal;
let program: Command;
beforeAll(() => {
  bench = benchTerminal();
  program = createProgram(bench.context, () => undefined);
  const row = { stage: 'testing', waitsFor: 'the bench' };
  const units = [
    { ...row, number: 413, plate: { maker: 'Tarnwell', model: 'T 2' } },
    { ...row, number: 412, plate: { maker: 'Brindle', model: 'BW 714' }, family: 'heron-h6' },
  ];
  keepUnits(bench.context.home, units, new Date('2026-03-05T09:00:00Z'));
  const text = readFileSync(new URL('../../../server/seed/shop/heron-h6.yaml', import.meta.url), 'utf8');
  mkdirSync(join(bench.home, 'cache', 'sheets'), { recursive: true });
  writeFileSync(join(bench.home, 'cache', 'sheets', 'heron-h6.json'), JSON.stringify({ sheet: readSheet(text, 'heron-h6.yaml') }));
  mkdirSync(join(bench.home, 'scripts'));
  writeFileSync(join(bench.home, 'scripts', 'quick-look.yaml'), 'format: refettle.script\n');
  writeFileSync(join(bench.home, 'scripts', 'no-script.yaml'), 'format: refettle.sheet\n');
  mkdirSync(join(bench.home, 'journal'), { recursive: true });
  writeFileSync(join(bench.home, 'journal', '019ac5d2-0000-7000-8000-000000000001.ndjson'), '');
});
afterAll(() => bench.remove());

const at = (line: string): string[] => {
  const words = typedWords(line).map(({ text }) => text);
  const { candidates, prefix } = complete(program, words.slice(0, -1), words.at(-1) ?? '', valuesOn(bench.context.home));
  return candidates.map(({ value }) => prefix + value);
};
const optionOf = (path: readonly string[], long: string) => {
  const command = path.reduce((from, name) => from.commands.find((each) => each.name() === name) ?? from, program);
  return command.options.find((option) => option.long === long);
};

describe('What can stand at the cursor', () => {
  // Expected values: read off the tree and the files written above.
  test.each([
    ['commands', 'si', ['sign-in', 'sign-out']],
    ['verbs of a noun', 'sheet ', ['check', 'add', 'show', 'help']],
    ['a verb that begins like that', 'unit sh', ['show']],
    ['options', 'unit list --', ['--find', '--stage', '--limit', '--json', '--help']],
    ['options that are not there yet', 'unit list --find x --json --', ['--stage', '--limit', '--help']],
    ['choices', 'unit list --stage s', ['signed off', 'sold']],
    ['choices behind an equals sign', 'unit list --stage=pro', ['--stage=proving']],
    ['units, the newest first', 'unit show ', ['0413', '0412']],
    ['checks of that unit’s sheet', 'measure 412 drain', ['drain-pump-winding']],
    ['checks, where options stand between', 'measure --value 3 412 drain', ['drain-pump-winding']],
    ['no checks of a unit without a sheet', 'measure 413 ', []],
    ['families', 'sheet show ', ['heron-h6']],
    ['simulated rigs', 'capture 412 --rig sim:heron-g', ['sim:heron-good']],
    ['entries and runs by their ids', 'sync --drop ', []],
    ['nothing in free text', 'repair 412 --note d', []],
    ['nothing for a measuring unit', 'judge --unit ', []],
    ['no options behind --', 'unit show -- --', []],
    ['nothing behind the last argument', 'unit show 412 x', []],
    ['nothing below a command that is none', 'refurbish ', []],
  ])('When %s are asked for, then they are those of the tree and of this bench', (_what, line, expected) => {
    expect(at(line)).toEqual(expected);
  });

  test('When nothing but options can come, then they are offered, those that must be there first', () => {
    expect(at('judge ').slice(0, 4)).toEqual(['--value', '--unit', '--accuracy', '--resolution']);
  });

  test('When a script is asked for, then the bench’s own and those that came with the program are offered by name, sheets are not', () => {
    expect(at('run ')).toEqual(['h6-find', 'h6-mend', 'h6-prove', 'quick-look']);
    expect(at('run h6-find ')).toEqual(['0413', '0412']);
  });

  test('When an option has few values, then they are those of the schema it is checked by', () => {
    expect(optionOf(['unit', 'new'], '--appliance')?.argChoices).toEqual(applianceSchema.options);
    expect(optionOf(['unit', 'new'], '--class')?.argChoices).toEqual(ratingPlateSchema.shape.protectionClass.options);
    expect(optionOf(['unit', 'new'], '--same-serial')?.argChoices).toEqual(newUnitSchema.shape.sameSerialReason.unwrap().options);
    expect(optionOf(['unit', 'list'], '--stage')?.argChoices).toEqual(stageSchema.options);
    const given = verdictSchema.exclude(['not done']).options;
    expect(new Set(optionOf(['measure'], '--verdict')?.argChoices)).toEqual(new Set(given));
  });

  test('When the bench’s copies hold rubbish, then nothing is offered and nothing breaks', () => {
    const other = benchTerminal();
    mkdirSync(join(other.home, 'cache', 'units'), { recursive: true });
    writeFileSync(join(other.home, 'cache', 'unit-list.json'), '{"units":[null,7,{"number":"x"}]');
    writeFileSync(join(other.home, 'cache', 'units', '0007.json'), '[]');
    expect(complete(program, ['unit', 'show'], '', valuesOn(other.context.home)).candidates).toEqual([]);
    other.remove();
  });
});

describe('A line as it is typed', () => {
  test.each([
    ['run  h6-find 4', ['run', 'h6-find', '4']],
    ['run ', ['run', '']],
    [String.raw`run my\ script.yaml `, ['run', 'my script.yaml', '']],
    [`run 'it is $(here)`, ['run', 'it is $(here)']],
    ['run "a \\"b\\" \\c" x', ['run', 'a "b" \\c', 'x']],
    ['', ['']],
  ])('When it is %j, then its words are what the program would get', (line, expected) => {
    expect(typedWords(line).map(({ text }) => text)).toEqual(expected);
  });

  test('When a path is typed, then files of that ending and folders are offered, hidden ones only when asked for', () => {
    const folder = join(bench.home, 'files');
    mkdirSync(join(folder, 'deep'), { recursive: true });
    for (const name of ['a.yaml', 'b.YML', 'c.txt', '.hidden.yaml']) writeFileSync(join(folder, name), '');
    expect(fileNames(`${folder}/`, ['yaml', 'yml'])).toEqual(['a.yaml', 'b.YML', 'deep/'].map((name) => `${folder}/${name}`));
    expect(fileNames(`${folder}/.h`, ['yaml'])).toEqual([`${folder}/.hidden.yaml`]);
    expect(fileNames(`${folder}/c`, ['*'])).toEqual([`${folder}/c.txt`]);
    expect(fileNames(`${folder}/nowhere/x`, ['*'])).toEqual([]);
  });
});
