import { readdirSync } from 'node:fs';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { migrationSource } from '../../server/migration-source.js';

const files = readdirSync(join(import.meta.dirname, '../../migrations')).filter((name) => name.endsWith('.ts'));
const names = await migrationSource.getMigrations([]);

test('When a migration lies in the folder, then it stands in the list, and the other way round', () => {
  expect(names).toEqual(files.map((name) => name.replace(/\.ts$/, '')).sort());
});

test('When migrations are named, then each begins with its own second, so that their order never changes', () => {
  const seconds = names.map((name) => name.slice(0, 14));

  for (const second of seconds) expect(second).toMatch(/^\d{14}$/);
  expect(new Set(seconds).size).toBe(names.length);
});

test('When a migration is taken from the list, then it has a way up and a way down', async () => {
  for (const name of names) {
    expect(await migrationSource.getMigration(name)).toMatchObject({
      up: expect.any(Function) as unknown,
      down: expect.any(Function) as unknown,
    });
  }
});
