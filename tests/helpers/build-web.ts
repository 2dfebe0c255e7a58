// Before the first browser test: the web as it will be served, built into a folder of its own so that a running shop keeps its files.
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { build } from 'vite';
import type { TestProject } from 'vitest/node';

declare module 'vitest' {
  interface ProvidedContext {
    /** Where the built web is. */
    webDir: string;
  }
}

export async function setup(project: TestProject): Promise<() => void> {
  // npm test has just built it.
  const built = process.env['REFETTLE_TEST_WEB'];
  if (built !== undefined) {
    project.provide('webDir', built);
    return () => undefined;
  }
  const folder = mkdtempSync(join(tmpdir(), 'refettle-test-web-'));
  // Vitest calls this a test, for which React would bring its development build: heavier, and not what is served.
  const before = process.env['NODE_ENV'];
  process.env['NODE_ENV'] = 'production';
  await build({ logLevel: 'warn', build: { outDir: folder, emptyOutDir: true } });
  process.env['NODE_ENV'] = before;
  project.provide('webDir', folder);
  return () => rmSync(folder, { recursive: true, force: true });
}
