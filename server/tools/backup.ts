// npm run backup [-- FILE]
import { existsSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { makeBackup } from '../backup/make-backup.js';
import { readConfig } from '../config.js';
import { openDb } from '../db.js';
import { withDatabase } from './reach-database.js';
import { fromHere, runTool, say } from './run-tool.js';

await runTool({
  help: `npm run backup [-- FILE or FOLDER] [--json]

One file with the whole shop: database, signing key, what else lies in the data folder. Made while the server runs or is off.
Whoever reads it can sign tags and see everybody's data: keep it as you keep the keys of the shop.
`,
  options: { json: { type: 'boolean' } },
  run: async (values, [given = '.']) => {
    const config = readConfig(process.env);
    const now = new Date();
    const named = fromHere(given);
    const isFolder = existsSync(named) && statSync(named).isDirectory();
    const file = isFolder ? join(named, `refettle-${now.toISOString().replace(/\D/g, '').slice(0, 14)}.tar`) : named;
    const made = await withDatabase(config, { alone: false }, async (databaseUrl) => {
      const db = openDb(databaseUrl);
      try {
        return await makeBackup({ db, databaseUrl, dataDir: config.dataDir, file, now, env: process.env });
      } finally {
        await db.destroy();
      }
    });
    const { manifest, files } = made;
    if (values['json']) return say(JSON.stringify(made));
    const { people, units, tags } = manifest.counts;
    say(
      `Backed up ${manifest.shop?.name ?? 'the shop'}: ${file}`,
      `  ${String(people)} people, ${String(units)} units, ${String(tags)} tags, and ${String(files.length)} files of the data folder${files.length > 0 ? ` (${files.slice(0, 5).join(', ')}${files.length > 5 ? ', …' : ''})` : ''}.`,
      'Not in it: certificates of TLS, and settings; those that were set stand in its manifest.json.',
      `Bring it back with: npm run restore -- ${file}`,
    );
  },
});
