// What is loaded before a command is known. Loading is what a start costs, and unlike milliseconds it can be counted on a busy machine.
import { execFile } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { promisify } from 'node:util';
import { expect, test } from 'vitest';
import { isBuilt, theProgram } from '../helpers/the-program.js';

/** The files that a start of the program loads, as Node itself counts what it ran. */
async function filesLoaded(...args: string[]): Promise<string[]> {
  const folder = mkdtempSync(join(tmpdir(), 'refettle-start-up-'));
  try {
    const env = { PATH: process.env['PATH'], LANG: 'C.UTF-8', REFETTLE_HOME: folder, NODE_V8_COVERAGE: join(folder, 'ran') };
    await promisify(execFile)(process.execPath, [...theProgram, ...args], { cwd: new URL('../..', import.meta.url), env });
    const urls = readdirSync(join(folder, 'ran')).flatMap((file) =>
      (JSON.parse(readFileSync(join(folder, 'ran', file), 'utf8')) as { result: { url: string }[] }).result.map(({ url }) => url),
    );
    return [...new Set(urls.filter((url) => url.startsWith('file:')).map((url) => fileURLToPath(url.replace(/\?.*/, ''))))];
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

function packagesOf(files: readonly string[]): string[] {
  const names = files.flatMap((file) => /.*\/node_modules\/((?:@[^/]+\/)?[^/]+)/.exec(file)?.[1] ?? []);
  // What runs TypeScript, where the program is not built.
  return [...new Set(names)].filter((name) => !['tsx', 'esbuild', 'get-tsconfig', 'resolve-pkg-maps'].includes(name)).sort();
}

/** The reader of command lines and the tree of commands are some 150 kB; what reads bodies (zod) alone is 190 more. */
const BUILT_BYTES = 200_000;

test.each([['--help'], ['unit', 'new', '--help'], ['__complete', 'fish', '--', 'unit', 'show', '']])(
  'When only help or completion is asked for (%s …), then nothing is loaded but the reader of command lines',
  async (...args) => {
    const files = await filesLoaded(...args);
    expect(packagesOf(files)).toEqual(isBuilt ? [] : ['commander']);
    if (isBuilt) expect(files.reduce((sum, file) => sum + statSync(file).size, 0)).toBeLessThan(BUILT_BYTES);
  },
);
