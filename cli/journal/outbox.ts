import { z } from 'zod';
import { newCaptureSchema } from '../../shared/api/captures.js';
import { newInspectionSchema, newReadingSchema, newRepairSchema } from '../../shared/api/readings.js';
import { newRunSchema } from '../../shared/api/runs.js';
import { newUnitSchema } from '../../shared/api/units.js';
import { personRefSchema } from '../../shared/history/events.js';
import { filesIn, makeFolder, moveIfThere, readIfThere, writeWhole, type Home } from '../home.js';
import { parseJson } from '../session.js';

const unit = z.strictObject({ number: z.number().int() });
const entryBase = {
  /** The Idempotency-Key: sent twice, it is stored once. */
  id: z.uuid(),
  madeAt: z.iso.datetime(),
  /** What was written down before it has a lower one, whatever the clock said. Entries of before there were numbers have none. */
  sequence: z.number().int().positive().optional(),
  server: z.string(),
  by: personRefSchema,
  /** For people: `bench run h6-find on No. 0412`. */
  what: z.string(),
  /** The server refused it; kept with who must act. */
  refused: z.strictObject({ at: z.iso.datetime(), status: z.number().int(), reason: z.string(), remedy: z.string() }).optional(),
};
const entrySchema = z.discriminatedUnion('route', [
  z.strictObject({ ...entryBase, route: z.literal('takeInUnit'), body: newUnitSchema }),
  z.strictObject({ ...entryBase, route: z.literal('recordCapture'), params: unit, body: newCaptureSchema }),
  z.strictObject({ ...entryBase, route: z.literal('recordReading'), params: unit, body: newReadingSchema }),
  z.strictObject({ ...entryBase, route: z.literal('recordInspection'), params: unit, body: newInspectionSchema }),
  z.strictObject({ ...entryBase, route: z.literal('recordRepair'), params: unit, body: newRepairSchema }),
  z.strictObject({ ...entryBase, route: z.literal('recordRun'), params: unit, body: newRunSchema }),
]);
/** One message from this bench to the server that must not get lost. */
export type OutboxEntry = z.infer<typeof entrySchema>;

const folderOf = (home: Home): string => home.path('journal', 'outbox');
const fileOf = (home: Home, id: string): string => home.path('journal', 'outbox', `${id}.json`);

/** Writes an entry down, behind what waits already; from here on it survives until the server has it. */
export function keepEntry(home: Home, entry: OutboxEntry): void {
  const { entries } = waitingEntries(home);
  const here = entries.find(({ id }) => id === entry.id);
  const sequence = here ? here.sequence : 1 + Math.max(0, ...entries.map((one) => one.sequence ?? 0));
  const { sequence: _told, ...rest } = entry;
  writeWhole(fileOf(home, entry.id), `${JSON.stringify(sequence === undefined ? rest : { ...rest, sequence })}\n`);
}

/** What waits, in the order in which it was written down. A file that can't be read is left where it is and named. */
export function waitingEntries(home: Home): { entries: OutboxEntry[]; unreadable: string[] } {
  const entries: OutboxEntry[] = [];
  const unreadable: string[] = [];
  for (const name of filesIn(folderOf(home)).filter((file) => file.endsWith('.json'))) {
    const file = home.path('journal', 'outbox', name);
    const text = readIfThere(file);
    if (text === undefined) continue; // another terminal has just sent it
    const parsed = entrySchema.safeParse(parseJson(text));
    if (parsed.success) entries.push(parsed.data);
    else unreadable.push(file);
  }
  entries.sort((a, b) => (a.sequence ?? 0) - (b.sequence ?? 0) || a.madeAt.localeCompare(b.madeAt) || a.id.localeCompare(b.id));
  return { entries, unreadable };
}

const UUID = /^[0-9a-f]{8}(?:-[0-9a-f]{4}){3}-[0-9a-f]{12}$/;

/** What waits no longer, by its id; undefined where this bench has none of it. */
export function awayEntry(home: Home, id: string, where: 'sent' | 'dropped'): OutboxEntry | undefined {
  if (!UUID.test(id)) return undefined;
  return entrySchema.safeParse(parseJson(readIfThere(home.path('journal', where, `${id}.json`)) ?? '')).data;
}

/** The server has it (`sent`), or a person gave it up (`dropped`): it waits no longer, and stays on the disk. */
export function putAway(home: Home, id: string, where: 'sent' | 'dropped'): void {
  // Where another terminal was quicker, the server stored it once all the same.
  moveIfThere(fileOf(home, id), `${makeFolder(home.path('journal', where))}/${id}.json`);
}
