// The lint rule is the only thing that keeps the houses apart: here wrong imports are planted, in each direction, and must be refused.
import { join } from 'node:path';
import { ESLint } from 'eslint';
import tseslint from 'typescript-eslint';
import { describe, expect, test } from 'vitest';

const root = join(import.meta.dirname, '../..');

// The project's own configuration; only the rules that need types are off, which would load the whole program for each line.
const eslint = new ESLint({ cwd: root, overrideConfig: [{ ...tseslint.configs.disableTypeChecked, files: ['**/*.ts', '**/*.tsx'] }] });

const direction = 'house/imports-go-one-way';

async function refusals(file: string, code: string): Promise<(string | null)[]> {
  const [result] = await eslint.lintText(code, { filePath: join(root, file) });
  const rules = (result?.messages ?? []).map((message) => message.ruleId);
  return rules.filter((rule) => rule !== '@typescript-eslint/no-unused-vars');
}
const importing = (source: string): string => `import { it } from '${source}';\nvoid it;\n`;

describe('When a house imports from another one, then lint refuses it', () => {
  test.each([
    ['shared/lamps/planted.ts', '../../cli/planted.js'],
    ['shared/lamps/planted.ts', '../../server/planted.js'],
    ['shared/lamps/planted.ts', '../../web/planted.js'],
    ['shared/lamps/planted.ts', '../../migrations/planted.js'],
    ['shared/lamps/planted.ts', '../../tests/helpers/planted.js'],
    ['shared/planted.ts', '../package.json'],
    ['cli/commands/unit/planted.ts', '../../../server/db.js'],
    ['cli/planted.ts', '../web/planted.js'],
    ['cli/planted.ts', '../migrations/planted.js'],
    ['cli/planted.ts', '../tests/helpers/planted.js'],
    ['server/features/units/planted.ts', '../../../cli/main.js'],
    ['server/planted.ts', '../web/paths.js'],
    ['server/planted.ts', '../tests/helpers/planted.js'],
    ['web/features/units/api/planted.ts', '../../../../cli/main.js'],
    ['web/pages/planted.tsx', '../../server/app.js'],
    ['web/planted.tsx', '../migrations/planted.js'],
    ['migrations/planted.ts', '../server/db.js'],
    // However the path is written.
    ['cli/planted.ts', './../server/db.js'],
    ['cli/commands/planted.ts', '../../cli/../server/db.js'],
  ])('%s imports %s', async (file, source) => {
    expect(await refusals(file, importing(source))).toEqual([direction]);
  });
});

describe('When the import is written in another form, then lint refuses it too', () => {
  test.each([
    ['a type', "import type { Db } from '../server/db.js';\nexport type Planted = Db;\n"],
    ['a re-export', "export { openDb } from '../server/db.js';\n"],
    ['a re-export of everything', "export * from '../server/db.js';\n"],
    ['a late import', "export const planted = () => import('../server/db.js');\n"],
    ['a type in place', "export type Planted = import('../server/db.js').Db;\n"],
  ])('%s', async (_form, code) => {
    expect(await refusals('cli/planted.ts', code)).toEqual([direction]);
  });
});

describe('When a feature imports from the feature beside it, then lint refuses it', () => {
  test.each([
    ['server/features/units/planted.ts', '../tags/tag-service.js'],
    ['server/features/units/planted.ts', '../tags/anything-at-all.js'],
    ['server/features/units/deep/planted.ts', '../../tags/tag-service.js'],
    ['web/features/units/api/planted.ts', '../../tags/api/get-tag.js'],
    ['web/features/units/components/planted.tsx', '../../tags/components/tag.js'],
    ['web/features/units/planted.tsx', '../../features/tags/components/tag.js'],
  ])('%s imports %s', async (file, source) => {
    expect(await refusals(file, importing(source))).toEqual([direction]);
  });
});

describe('When shared or web imports a module of Node, then lint refuses it', () => {
  test.each([
    ['shared/planted.ts', 'node:fs'],
    ['shared/planted.ts', 'fs/promises'],
    ['shared/planted.ts', 'crypto'],
    ['web/planted.tsx', 'node:path'],
    ['web/lib/planted.ts', 'child_process'],
  ])('%s imports %s', async (file, source) => {
    expect(await refusals(file, importing(source))).toEqual([direction]);
  });
});

test.each(['express', 'react', 'knex', 'uuid'])('When shared imports the package %s, then lint refuses it', async (source) => {
  expect(await refusals('shared/planted.ts', importing(source))).toEqual([direction]);
});

describe('When an import goes the right way, then lint lets it pass', () => {
  test.each([
    ['shared/decode/planted.ts', '../lamps/capture.js'],
    ['shared/planted.ts', 'zod'],
    ['shared/planted.ts', 'yaml'],
    ['shared/planted.ts', '@stdlib/stats-base-dists-normal-cdf'],
    ['cli/commands/unit/planted.ts', '../../../shared/verdict.js'],
    ['cli/planted.ts', 'node:fs'],
    ['server/features/units/planted.ts', '../../db.js'],
    ['server/features/units/planted.ts', './unit-store.js'],
    ['server/features/units/planted.ts', '../../../shared/verdict.js'],
    ['server/app.ts', './features/units/unit-routes.js'],
    ['server/planted.ts', '../migrations/20261201090000_first.js'],
    ['web/pages/planted.tsx', '../features/units/components/unit-card.js'],
    ['web/features/units/components/planted.tsx', '../api/get-unit.js'],
    ['web/features/units/components/planted.tsx', '../../../components/button.js'],
    ['web/planted.tsx', 'react'],
  ])('%s imports %s', async (file, source) => {
    expect(await refusals(file, importing(source))).toEqual([]);
  });
});

describe('When shared reaches for the machine, then lint refuses it', () => {
  test.each([
    ['the clock', 'export const planted = Date.now();\n', 'no-restricted-properties'],
    ['the clock in another way', 'export const planted = new Date();\n', 'no-restricted-syntax'],
    ['chance', 'export const planted = Math.random();\n', 'no-restricted-properties'],
    ['the process', 'export const planted = process.env;\n', 'no-restricted-globals'],
    ['the page', 'export const planted = document.title;\n', 'no-restricted-globals'],
    ['the network', "export const planted = fetch('/');\n", 'no-restricted-globals'],
    ['a timer', 'export const planted = setTimeout(() => undefined, 1);\n', 'no-restricted-globals'],
  ])('%s', async (_reach, code, rule) => {
    expect(await refusals('shared/planted.ts', code)).toEqual([rule]);
  });
});

test('When a time that was passed in is read in shared, then lint lets it pass', async () => {
  expect(await refusals('shared/planted.ts', 'export const planted = (at: string) => new Date(at).getTime();\n')).toEqual([]);
});

test.each(['shared/planted.ts', 'cli/planted.ts', 'server/planted.ts', 'web/planted.tsx'])(
  'When %s has a default export, then lint refuses it',
  async (file) => {
    expect(await refusals(file, 'export default 1;\n')).toEqual(['no-restricted-syntax']);
  },
);
