// npm run backup [-- FILE]
import { existsSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { backupNameOf, keepNewest } from '../backup/backup-folder.js';
import { makeBackup } from '../backup/make-backup.js';
import { readConfig } from '../config.js';
import { openDb } from '../db.js';
import { SetUpError } from '../set-up-error.js';
import { withDatabase } from './reach-database.js';
import { fromHere, runTool, say } from './run-tool.js';

await runTool({
  help: `npm run backup [-- FILE or FOLDER] [--keep N] [--json]

One file with the whole shop: database, signing key, what else lies in the data folder. Made while the server runs or is off.
Whoever reads it can sign tags and see everybody's data: keep it as you keep the keys of the shop.
--keep: of the backups in the folder, only the newest N stay; without it none is ever deleted.
`,
  options: { keep: { type: 'string' }, json: { type: 'boolean' } },
  run: async (values, [given = '.']) => {
    const config = readConfig(process.env);
    const now = new Date();
    const named = fromHere(given);
    const isFolder = existsSync(named) && statSync(named).isDirectory();
    const file = isFolder ? join(named, backupNameOf(now)) : named;
    const keep = values['keep'] === undefined ? undefined : Number(values['keep']);
    if (keep !== undefined && (!Number.isInteger(keep) || keep < 1 || !isFolder))
      throw new SetUpError(
        '--keep takes a whole number from 1 on, and a folder of backups.',
        'For example: npm run backup -- FOLDER --keep 30.',
      );
    const made = await withDatabase(config, { alone: false }, async (databaseUrl) => {
      const db = openDb(databaseUrl);
      try {
        return await makeBackup({ db, databaseUrl, dataDir: config.dataDir, file, now, env: process.env });
      } finally {
        await db.destroy();
      }
    });
    const { manifest, files } = made;
    // Only now: the new one is whole and on the disk.
    const deleted = keep === undefined ? [] : keepNewest(named, keep);
    if (values['json']) return say(JSON.stringify({ ...made, deleted }));
    const { people, units, tags } = manifest.counts;
    say(
      `Backed up ${manifest.shop?.name ?? 'the shop'}: ${file}`,
      `  ${String(people)} people, ${String(units)} units, ${String(tags)} tags, and ${String(files.length)} files of the data folder${files.length > 0 ? ` (${files.slice(0, 5).join(', ')}${files.length > 5 ? ', …' : ''})` : ''}.`,
      ...(deleted.length > 0 ? [`Deleted, being older than the newest ${String(keep)}: ${deleted.join(', ')}.`] : []),
      'Not in it: certificates of TLS, and settings; those that were set stand in its manifest.json.',
      `Bring it back with: npm run restore -- ${file}`,
    );
  },
});
