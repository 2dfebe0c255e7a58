// npm run restore -- FILE [--replace]
import { restoreBackup } from '../backup/restore-backup.js';
import { readConfig } from '../config.js';
import { SetUpError } from '../set-up-error.js';
import { withDatabase } from './reach-database.js';
import { fromHere, runTool, say } from './run-tool.js';

await runTool({
  help: `npm run restore -- FILE [--replace] [--json]

Brings a shop back from a backup, into the data folder and the database that the settings name. The server must be off.
Where a shop stands already, only with --replace; it is kept in a backup of its own first.
Sessions, benches' tokens and one-time links of the backup are ended: some may have been revoked since it was made.
`,
  options: { replace: { type: 'boolean' }, json: { type: 'boolean' } },
  run: async (values, [file]) => {
    if (file === undefined) throw new SetUpError('Which backup?', 'Name it: npm run restore -- FILE.');
    const config = readConfig(process.env);
    const restored = await withDatabase(config, { alone: true }, (databaseUrl) =>
      restoreBackup({
        databaseUrl,
        dataDir: config.dataDir,
        file: fromHere(file),
        replace: values['replace'] === true,
        now: new Date(),
        env: process.env,
      }),
    );
    if (values['json']) return say(JSON.stringify(restored));
    const { manifest, files, migrated, kept, ended, active } = restored;
    const { people, units, tags } = manifest.counts;
    const settings = Object.entries(manifest.settings).filter(([name, value]) => name !== 'REFETTLE_DATA' && process.env[name] !== value);
    say(
      `Restored ${manifest.shop?.name ?? 'the shop'} as it was at ${manifest.madeAt}: ${String(people)} people, ${String(units)} units, ${String(tags)} tags, ${String(files.length)} files.`,
      ...(migrated.length > 0 ? [`It was older than this Refettle, and went through ${migrated.join(', ')}.`] : []),
      ...(kept.backup ? [`What was there before is in ${kept.backup}.`] : []),
      ...(kept.files ? [`Files that lay in the data folder are in ${kept.files}.`] : []),
      ...(settings.length > 0
        ? [`Settings that were set then, and are not now:\n${settings.map(([name, value]) => `  ${name}=${value}`).join('\n')}`]
        : []),
      `Active as at that time: ${active.map(({ name, role }) => `${name} (${role})`).join(', ') || 'nobody'}. Whoever left since then is in again: an admin deactivates them first thing.`,
      ...(ended.benches.length > 0
        ? [`Shared benches that need a new token, and everybody’s sign-on with it: ${ended.benches.join(', ')}.`]
        : []),
      'Now start it: npm start. Everybody signs in anew, by the password of that time; one-time links of before are void.',
    );
  },
});
