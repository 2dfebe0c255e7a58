import { randomInt } from 'node:crypto';
import { readFileSync, rmSync } from 'node:fs';
import { hostname } from 'node:os';
import { z } from 'zod';
import type { Context } from '../context.js';
import { filesIn, makeFolder, readIfThere, writeWhole, type Home } from '../home.js';
import { dayText, timeText } from '../render/words.js';
import { parseJson } from '../session.js';

/** One process, told from every other one, now and later. */
export const processSchema = z.strictObject({
  pid: z.number().int(),
  /** When the kernel started that process and which boot it was: a number is given out again after a while. Absent where the system does not say. */
  processStart: z.string().optional(),
  boot: z.string().optional(),
  host: z.string(),
});

const ownerSchema = processSchema.extend({
  /** Since when, by the bench's clock. */
  since: z.iso.datetime(),
  /** For people: `bench run h6-find on No. 0412, by Wil Tarrow`. */
  what: z.string(),
  run: z.string().optional(),
});
export interface LockOwner extends z.infer<typeof ownerSchema> {
  /** Where that stands. */
  file?: string;
}

export interface Lock {
  release(): void;
}

/** Somebody else holds it. */
export interface Held {
  owner: LockOwner;
}

/** Two who come at the same moment both step back; each tries again a few times, after a moment of its own length. */
const TRIES = 5;
const STEP_BACK_MS = { least: 5, most: 60 };

const folderOf = (home: Home, name: string): string => home.path('journal', 'locks', encodeURIComponent(name));

/**
 * Takes a lock of this bench. Everybody who wants it puts a file of their own down first and looks round afterwards, so of two at
 * least one sees the other. Files of processes that are gone are cleared away, and it is said whose they were.
 */
export async function takeLock(context: Context, name: string, about: { what: string; run?: string }): Promise<Lock | Held> {
  const folder = makeFolder(folderOf(context.home, name));
  const mine = `${folder}/${process.pid}-${context.newId()}.json`;
  const owner: LockOwner = { ...thisProcess(), since: context.now().toISOString(), ...about };
  for (let tries = 1; ; tries += 1) {
    writeWhole(mine, `${JSON.stringify(owner)}\n`);
    const other = holders(context, name, { besides: mine, clear: true })[0];
    if (!other) return { release: () => rmSync(mine, { force: true }) };
    rmSync(mine, { force: true });
    if (tries === TRIES) return { owner: other };
    await context.sleep(randomInt(STEP_BACK_MS.least, STEP_BACK_MS.most));
  }
}

/** Who holds a lock now; undefined where nobody does. */
export const lockOwner = (context: Pick<Context, 'home' | 'stderr'>, name: string): LockOwner | undefined => holders(context, name)[0];

function holders(
  { home, stderr }: Pick<Context, 'home' | 'stderr'>,
  name: string,
  { besides, clear = false }: { besides?: string; clear?: boolean } = {},
): LockOwner[] {
  const folder = folderOf(home, name);
  return filesIn(folder).flatMap((entry) => {
    const file = `${folder}/${entry}`;
    if (file === besides || !entry.endsWith('.json')) return [];
    const owner = ownerSchema.safeParse(parseJson(readIfThere(file) ?? '')).data;
    if (owner && isAlive(owner)) return [{ ...owner, file }];
    if (clear) {
      rmSync(file, { force: true });
      if (owner)
        stderr.say(
          `The ${owner.what} of ${dayText(owner.since)}, ${timeText(owner.since)}, is no longer going (process ${owner.pid} is gone): its place is taken over.`,
        );
    }
    return [];
  });
}

/** Who holds it and since when, for whoever is turned away. Whether something on another machine still goes on, only a person can say. */
export function heldWords(owner: LockOwner): string {
  const { what, since, pid, host, file } = owner;
  const goes = `${what}, since ${dayText(since)} ${timeText(since)}`;
  if (isOfThisMachine(owner)) return `${goes} (process ${pid})`;
  return `${goes} (process ${pid} on ${host}${file === undefined ? '' : `; where nothing goes on there any more, delete ${file}`})`;
}

export const thisProcess = (): z.infer<typeof processSchema> => ({ pid: process.pid, ...processMarks(process.pid), host: hostname() });

/** Whether the very process that took a lock still runs. On another machine nobody can tell: it is taken to. */
export function isAlive(owner: z.infer<typeof processSchema>): boolean {
  if (!isOfThisMachine(owner)) return true;
  try {
    process.kill(owner.pid, 0);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code !== 'EPERM') return false;
  }
  const now = processMarks(owner.pid);
  const same = (then: string | undefined, is: string | undefined): boolean => then === undefined || is === undefined || then === is;
  return same(owner.boot, now.boot) && same(owner.processStart, now.processStart);
}

/** A machine is called otherwise now and then; one boot is one machine all the same. */
const isOfThisMachine = ({ host, boot }: Pick<LockOwner, 'host' | 'boot'>): boolean =>
  host === hostname() || (boot !== undefined && boot === processMarks(process.pid).boot);

/** What tells a process from another one that got its number later (proc(5): field 22 of stat is its start in clock ticks since the boot). */
function processMarks(pid: number): Pick<LockOwner, 'processStart' | 'boot'> {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8');
    const [state, ...fields] = stat.slice(stat.lastIndexOf(')') + 2).split(' ');
    const boot = readFileSync('/proc/sys/kernel/random/boot_id', 'utf8').trim();
    // A process that has ended and that nobody has asked about yet holds nothing any more.
    return { processStart: state === 'Z' ? 'ended' : (fields[18] ?? ''), boot };
  } catch {
    return {};
  }
}
