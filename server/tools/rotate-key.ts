// npm run rotate-key [-- --compromised --by EMAIL --reason TEXT]
import { findPersonByEmail } from '../auth/people-store.js';
import { readConfig } from '../config.js';
import { migrate, openDb } from '../db.js';
import { rotateSigningKey } from '../features/tags/rotate-signing-key.js';
import { SetUpError } from '../set-up-error.js';
import { withDatabase } from './reach-database.js';
import { runTool, say } from './run-tool.js';

type Db = ReturnType<typeof openDb>;

await runTool({
  help: `npm run rotate-key [-- --compromised --by EMAIL --reason TEXT] [--json]

A new key signs from now on, also in a server that runs. Tags that the old one signed stand and are verified as before.
--compromised: somebody else may have had the old key. Its standing tags are withdrawn in the name of the lead or admin that --by
names, for the reason given; their units are signed off anew.
`,
  options: { compromised: { type: 'boolean' }, by: { type: 'string' }, reason: { type: 'string' }, json: { type: 'boolean' } },
  run: async ({ compromised, by, reason, json }) => {
    const config = readConfig(process.env);
    const rotated = await withDatabase(config, { alone: false }, async (databaseUrl) => {
      const db = openDb(databaseUrl);
      try {
        await migrate(db);
        return await rotateSigningKey({
          db,
          dataDir: config.dataDir,
          now: new Date(),
          compromised: compromised === true ? await whoWithdraws(db, by, reason) : undefined,
        });
      } finally {
        await db.destroy();
      }
    });
    if (json) return say(JSON.stringify(rotated));
    const { before, after, withdrawn } = rotated;
    say(
      `Tags are signed by key ${after} from now on.`,
      compromised === true
        ? `Key ${before} is withdrawn as compromised, and with it ${withdrawn.length === 0 ? 'no standing tag' : `the standing tags ${withdrawn.join(', ')}: sign these units off anew`}.`
        : `Key ${before} is retired; tags that it signed are verified as before.`,
      'Make a new backup: earlier ones hold the old key.',
    );
  },
});

async function whoWithdraws(db: Db, email: unknown, reason: unknown) {
  if (typeof email !== 'string' || typeof reason !== 'string' || reason.trim().length < 5) {
    throw new SetUpError(
      'Tags are withdrawn in somebody’s name and for a reason.',
      'Give both: npm run rotate-key -- --compromised --by lead@example.org --reason "the laptop was stolen".',
    );
  }
  const found = await findPersonByEmail(db, email);
  if (!found?.active || !['lead', 'admin'].includes(found.user.role))
    throw new SetUpError(`There is no lead or admin with the address ${email}.`, 'Name one who can answer for it.');
  return { by: found.user, reason: reason.trim() };
}
