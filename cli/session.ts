import { rmSync } from 'node:fs';
import { z } from 'zod';
import { meSchema, userSchema, type Shop } from '../shared/api/sessions.js';
import type { PersonRef } from '../shared/history/events.js';
import type { Context } from './context.js';
import { NotSignedInError, ServerUnreachableError } from './errors.js';
import { readIfThere, writeWhole, type Home } from './home.js';

const sessionSchema = z.strictObject({ server: z.string(), token: z.string(), user: userSchema });
export type Session = z.infer<typeof sessionSchema>;

const TOKEN_FILE = 'token.json';
const ME_FILE = ['cache', 'me.json'] as const;

/** Who is signed in at this server on this bench; undefined where nobody is, or the file says nothing that can be read. */
export function readSession(home: Home, server: string): Session | undefined {
  const text = readIfThere(home.path(TOKEN_FILE));
  const parsed = text === undefined ? undefined : sessionSchema.safeParse(parseJson(text));
  return parsed?.success && parsed.data.server === server ? parsed.data : undefined;
}

export function keepSession(home: Home, session: Session): void {
  writeWhole(home.path(TOKEN_FILE), `${JSON.stringify(session, null, 2)}\n`);
}

export function forgetSession(home: Home): void {
  rmSync(home.path(TOKEN_FILE), { force: true });
  rmSync(home.path(...ME_FILE), { force: true });
}

/** Who works here, the shop, and the shared bench where this is one. An e-mail address only on a bench of one's own. */
export interface Me {
  user: PersonRef & { email?: string | undefined };
  shop: Shop;
  bench?: { id: string; name: string } | undefined;
}

/**
 * Who is here, and the shop: who is signed in, or on a shared bench who stands at it, asked for where nobody has signed on.
 * Refuses as whoIsSignedIn and signOn do.
 */
export async function whoIsHere(context: Context): Promise<Me & { offline: boolean }> {
  const { joinedBench } = await import('./bench/joined-bench.js');
  const joined = joinedBench(context.home, context.server);
  return joined ? (await import('./bench/sign-on.js')).whoStandsHere(context, joined) : whoIsSignedIn(context);
}

/** The shop: on a shared bench whoever stands there, else as for who is signed in. */
export async function shopHere(context: Context): Promise<Shop> {
  const { benchView, joinedBench } = await import('./bench/joined-bench.js');
  return joinedBench(context.home, context.server) ? (await benchView(context)).shop : (await whoIsSignedIn(context)).shop;
}

/**
 * Who is signed in with an account of their own, and the shop. From the server; where the network is away, as it was last time.
 * Refuses (NotSignedInError) where nobody is signed in.
 */
export async function whoIsSignedIn(context: Context): Promise<z.infer<typeof meSchema> & { offline: boolean }> {
  const session = readSession(context.home, context.server);
  if (!session) throw new NotSignedInError(context.server);
  const file = context.home.path(...ME_FILE);
  try {
    const me = await (await context.api()).call('me');
    writeWhole(file, JSON.stringify(me));
    return { ...me, offline: false };
  } catch (error) {
    if (!(error instanceof ServerUnreachableError)) throw error;
    const kept = meSchema.safeParse(parseJson(readIfThere(file) ?? ''));
    if (!kept.success || kept.data.user.id !== session.user.id) throw error;
    return { ...kept.data, offline: true };
  }
}

export const personOf = (user: { id: string; name: string; role: PersonRef['role'] }): PersonRef => ({
  id: user.id,
  name: user.name,
  role: user.role,
});

/** The value of a JSON text; undefined where it is none. */
export function parseJson(text: string): unknown {
  try {
    return JSON.parse(text) as unknown;
  } catch {
    return undefined;
  }
}
