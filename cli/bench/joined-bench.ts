import { rmSync } from 'node:fs';
import { z } from 'zod';
import { ownBenchSchema, type OwnBench } from '../../shared/api/benches.js';
import type { Context } from '../context.js';
import { ServerUnreachableError } from '../errors.js';
import { readIfThere, writeWhole, type Home } from '../home.js';
import { BENCH_FILE } from '../joined-server.js';
import { parseJson } from '../session.js';
import { forgetPeople, keepOnlyOffered } from './known-people.js';
import { forgetSignOn } from './kept-sign-on.js';

const joinedSchema = z.strictObject({
  server: z.string(),
  bench: z.strictObject({ id: z.string(), name: z.string() }),
  token: z.string(),
});
/** This computer is a shared bench: its name, and the token by which the server knows it. */
export type JoinedBench = z.infer<typeof joinedSchema>;

const VIEW_FILE = ['cache', 'bench.json'] as const;

/** The shared bench that this computer is at this server; undefined where it is somebody's own, or the file says nothing that can be read. */
export function joinedBench(home: Home, server: string): JoinedBench | undefined {
  const parsed = joinedSchema.safeParse(parseJson(readIfThere(home.path(BENCH_FILE)) ?? ''));
  return parsed.success && parsed.data.server === server ? parsed.data : undefined;
}

export function keepBench(home: Home, joined: JoinedBench): void {
  writeWhole(home.path(BENCH_FILE), `${JSON.stringify(joined, null, 2)}\n`);
}

/** The bench, the people it has seen, and who stands at it: nothing of it stays on this computer. The journal does. */
export function forgetBench(home: Home): void {
  for (const file of [home.path(BENCH_FILE), home.path(...VIEW_FILE)]) rmSync(file, { force: true });
  forgetPeople(home);
  forgetSignOn(home);
}

/** Takes in what the server says of this bench. Who left, or has another PIN by now, can no longer sign on here without the network. */
export function keepView({ home }: Pick<Context, 'home'>, own: OwnBench): void {
  writeWhole(home.path(...VIEW_FILE), JSON.stringify(own));
  keepOnlyOffered(home, own);
}

/** The bench's own view, from the server; where the network is away, as it was last time. */
export async function benchView(context: Context): Promise<OwnBench & { offline: boolean }> {
  try {
    const own = await (await context.api()).call('ownBench');
    keepView(context, own);
    return { ...own, offline: false };
  } catch (error) {
    if (!(error instanceof ServerUnreachableError)) throw error;
    const kept = ownBenchSchema.safeParse(parseJson(readIfThere(context.home.path(...VIEW_FILE)) ?? ''));
    if (!kept.success) throw error;
    return { ...kept.data, offline: true };
  }
}
