import type { BenchRig } from '../../shared/api/benches.js';
import { BadInputError } from '../../shared/errors.js';
import type { Context } from '../context.js';
import { ServerError } from '../errors.js';
import { loadRig } from '../instruments/rig-file.js';
import { readIfThere, writeWhole } from '../home.js';
import { RIG_FILE } from '../instruments/rig-file.js';

const TOLD_FILE = ['cache', 'rig-told.json'] as const;

/**
 * Tells the server what hangs on this shared bench, as its rig file has it. Undefined where there is no rig file, or none that can be
 * read: that is said when the rig is used. Never stands in the way of anything.
 */
export async function reportRigOf(context: Context): Promise<BenchRig | undefined> {
  const { home } = context;
  if (readIfThere(home.path(RIG_FILE)) === undefined) return undefined;
  try {
    const { name, instruments } = await loadRig(home.folder);
    const rig: BenchRig = { name, instruments: instruments.map(({ id, kind, port }) => ({ id, kind, port })) };
    const told = JSON.stringify({ server: context.server, rig });
    if (readIfThere(home.path(...TOLD_FILE)) !== told) {
      await (await context.api()).call('reportRig', { body: rig });
      writeWhole(home.path(...TOLD_FILE), told);
    }
    return rig;
  } catch (error) {
    if (error instanceof ServerError || error instanceof BadInputError) return undefined;
    throw error;
  }
}
