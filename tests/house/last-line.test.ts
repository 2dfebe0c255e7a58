// The last line of npm test counts what failed, also what is no test: a file that does not load must not look like a success.
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { execa } from 'execa';
import { afterAll, beforeAll, expect, test } from 'vitest';

const root = join(import.meta.dirname, '../..');
const fixtures = join(root, 'tests/fixtures/count-reporter');

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-test-count-'));
  // One worker for all files, as in the projects: to start one for each took longer than the tests.
  const test = { include: ['**/*.test.ts'], pool: 'forks', isolate: false, maxWorkers: 1 };
  writeFileSync(join(folder, 'vitest.config.mjs'), `export default ${JSON.stringify({ test })};\n`);
});
afterAll(() => {
  rmSync(folder, { recursive: true, force: true });
});

async function countOf(...files: string[]): Promise<{ line: string; exitCode: number | undefined }> {
  const count = join(folder, 'count');
  const { exitCode } = await execa(
    join(root, 'node_modules/.bin/vitest'),
    [
      'run',
      '--root',
      fixtures,
      '--config',
      join(folder, 'vitest.config.mjs'),
      '--reporter',
      join(root, 'tests/helpers/count-reporter.ts'),
      ...files,
    ],
    { env: { REFETTLE_TEST_COUNT: count }, reject: false, cwd: root },
  );
  return { line: readFileSync(count, 'utf8').trim(), exitCode };
}

test.each([
  { files: ['passes'], line: '2 0', exitCode: 0 },
  { files: ['leaves-a-rejection'], line: '1 1', exitCode: 1 },
  { files: ['passes', 'fails', 'set-up-throws', 'does-not-load'], line: '3 3', exitCode: 1 },
])('When $files run, then "passed failed" is $line and the exit code $exitCode', async ({ files, line, exitCode }) => {
  expect(await countOf(...files)).toEqual({ line, exitCode });
});
