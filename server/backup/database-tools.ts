import { existsSync, readdirSync } from 'node:fs';
import { delimiter, join } from 'node:path';
import { execa } from 'execa';
import pg from 'pg';
import { SetUpError } from '../set-up-error.js';

const debianFolder = '/usr/lib/postgresql';
const FIRST_MAJOR_OF_TWO = 10_000;

/** 15 from 150018. */
export async function majorOf(url: string): Promise<number> {
  return withClient(url, async (client) => {
    const { rows } = await client.query<{ server_version_num: string }>('show server_version_num');
    return Math.floor(Number(rows[0]?.server_version_num) / FIRST_MAJOR_OF_TWO);
  });
}

async function withClient<T>(url: string, work: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client({ connectionString: url, application_name: 'refettle-backup' });
  await client.connect();
  try {
    return await work(client);
  } finally {
    await client.end();
  }
}

/** The folder of pg_dump and pg_restore of the server's own version: an older one can't read it, a newer one writes what it can't take back. */
function toolsOf(major: number): string {
  const folders = [process.env['PG_BIN'], join(debianFolder, String(major), 'bin'), ...onlyVersion(major)];
  const found = folders.find((folder) => folder && ['pg_dump', 'pg_restore', 'psql'].every((tool) => existsSync(join(folder, tool))));
  if (found) return found;
  throw new SetUpError(
    `The database is a PostgreSQL ${String(major)}, and its programs pg_dump, pg_restore and psql are not on this machine.`,
    `Install them: apt-get install -y --no-install-recommends postgresql-client-${String(major)} (or set PG_BIN to their folder).`,
  );
}

/** Where no folder has the version in its name, what is on the PATH is all there is. */
function onlyVersion(major: number): string[] {
  const versions = existsSync(debianFolder) ? readdirSync(debianFolder) : [];
  return versions.length > 0 && !versions.includes(String(major)) ? [] : (process.env.PATH ?? '').split(delimiter);
}

/** By environment and never on the command line, where every user of the machine could read the password. */
function connectionOf(url: string): { env: Record<string, string>; database: string } {
  const { password } = new URL(url);
  const bare = new URL(url);
  bare.password = '';
  return { env: { ...(password ? { PGPASSWORD: decodeURIComponent(password) } : {}), LC_ALL: 'C.UTF-8' }, database: bare.href };
}

async function tool(url: string, name: string, args: string[]): Promise<void> {
  const path = join(toolsOf(await majorOf(url)), name);
  const { env } = connectionOf(url);
  const { exitCode, stderr } = await execa(path, args, { env, reject: false, stdin: 'ignore', stdout: 'ignore' });
  if (exitCode !== 0) throw new Error(`${name} ended with ${String(exitCode)}: ${stderr.trim().split('\n').slice(0, 8).join('\n')}`);
}

/** One moment of the whole database, while others go on working in it. */
export const dumpDatabase = (url: string, file: string): Promise<void> =>
  tool(url, 'pg_dump', ['--format=custom', '--no-owner', '--no-privileges', `--file=${file}`, `--dbname=${connectionOf(url).database}`]);

/**
 * Everything of the schema `public`, and nothing else: neither the schema nor what an extension brought. Needs no right beyond owning
 * what is dropped.
 */
const DROP_EVERYTHING = `
do $$
declare one record;
begin
  for one in select c.oid::regclass as name, c.relkind as kind from pg_class c
      where c.relnamespace = 'public'::regnamespace and c.relkind in ('r', 'p', 'v', 'm', 'f')
        and not exists (select from pg_depend d where d.objid = c.oid and d.deptype = 'e') loop
    execute format('drop %s if exists %s cascade',
      case one.kind when 'v' then 'view' when 'm' then 'materialized view' when 'f' then 'foreign table' else 'table' end, one.name);
  end loop;
  for one in select c.oid::regclass as name from pg_class c where c.relnamespace = 'public'::regnamespace and c.relkind = 'S' loop
    execute format('drop sequence if exists %s cascade', one.name);
  end loop;
  for one in select p.oid::regprocedure as name from pg_proc p where p.pronamespace = 'public'::regnamespace
        and not exists (select from pg_depend d where d.objid = p.oid and d.deptype = 'e') loop
    execute format('drop routine if exists %s cascade', one.name);
  end loop;
  for one in select t.oid::regtype as name from pg_type t where t.typnamespace = 'public'::regnamespace and t.typtype in ('e', 'd') loop
    execute format('drop type if exists %s cascade', one.name);
  end loop;
end $$;
`;

/** Puts a dump in the place of what is there, in one transaction: all of it, or nothing has changed. */
export async function replaceDatabase(url: string, dump: string, workshop: string): Promise<void> {
  const script = join(workshop, 'restore.sql');
  await tool(url, 'pg_restore', ['--no-owner', '--no-privileges', `--file=${script}`, dump]);
  await tool(url, 'psql', [
    ...['--no-psqlrc', '--quiet', '--set=ON_ERROR_STOP=1', '--single-transaction', `--dbname=${connectionOf(url).database}`],
    `--command=${DROP_EVERYTHING}`,
    `--file=${script}`,
  ]);
}
