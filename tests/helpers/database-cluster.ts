// Before the first test file: one PostgreSQL for all projects that need it, and in it one migrated database to copy from.
import { mkdtempSync, chmodSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { TestProject } from 'vitest/node';
import { migrate, openDb } from '../../server/db.js';
import { startCluster } from '../../server/postgres/cluster.js';

declare module 'vitest' {
  interface ProvidedContext {
    /** Of a database that stays empty: to make others from. */
    clusterUrl: string;
  }
}

export const templateName = 'refettle_template';

export async function setup(project: TestProject, options: { durable: boolean } = { durable: false }): Promise<() => Promise<void>> {
  const folder = mkdtempSync(join(tmpdir(), 'refettle-test-cluster-'));
  chmodSync(folder, 0o711); // as root, PostgreSQL's user must pass through
  const cluster = await startCluster(
    { folder: join(folder, 'postgres'), passwordFile: join(folder, 'password'), logFile: join(folder, 'postgres.log') },
    options,
  );
  const maintenance = openDb(cluster.url);
  await maintenance.raw('create database ??', [templateName]);
  await maintenance.destroy();
  const template = openDb(urlOfDatabase(cluster.url, templateName));
  await migrate(template);
  await template.destroy(); // one that is connected to can't be copied
  project.provide('clusterUrl', cluster.url);
  return async () => {
    await cluster.stop();
    rmSync(folder, { recursive: true, force: true });
  };
}

export function urlOfDatabase(clusterUrl: string, name: string): string {
  const url = new URL(clusterUrl);
  url.pathname = `/${name}`;
  return url.href;
}
