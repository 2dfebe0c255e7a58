// What is loaded before a command is known. Loading is what a start costs, and unlike milliseconds it can be counted on a busy machine.
import { execFile } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { expect, test } from 'vitest';
import { theProgram } from '../helpers/the-program.js';

/** The packages that a start of the program loads, as Node itself counts what it ran. */
async function packagesLoaded(...args: string[]): Promise<string[]> {
  const folder = mkdtempSync(join(tmpdir(), 'refettle-start-up-'));
  try {
    const env = { PATH: process.env['PATH'], LANG: 'C.UTF-8', REFETTLE_HOME: folder, NODE_V8_COVERAGE: join(folder, 'ran') };
    await promisify(execFile)(process.execPath, [...theProgram, ...args], { cwd: new URL('../..', import.meta.url), env });
    const urls = readdirSync(join(folder, 'ran')).flatMap((file) =>
      (JSON.parse(readFileSync(join(folder, 'ran', file), 'utf8')) as { result: { url: string }[] }).result.map(({ url }) => url),
    );
    const names = urls.flatMap((url) => /.*\/node_modules\/((?:@[^/]+\/)?[^/]+)/.exec(url)?.[1] ?? []);
    // What runs TypeScript, where the program is not built.
    return [...new Set(names)].filter((name) => !['tsx', 'esbuild', 'get-tsconfig', 'resolve-pkg-maps'].includes(name)).sort();
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

test.each([['--help'], ['unit', 'new', '--help'], ['__complete', 'fish', '--', 'unit', 'show', '']])(
  'When only help or completion is asked for (%s …), then nothing is loaded but the reader of command lines',
  async (...args) => {
    expect(await packagesLoaded(...args)).toEqual(['commander']);
  },
);
