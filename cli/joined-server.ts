import { readIfThere, type Home } from './home.js';

export const BENCH_FILE = 'bench.json';

/** The server that this computer has joined as a shared bench, if it has: read without anything that is slow to load. */
export function joinedServer(home: Home): string | undefined {
  try {
    const joined = JSON.parse(readIfThere(home.path(BENCH_FILE)) ?? '') as { server?: unknown };
    return typeof joined.server === 'string' ? joined.server : undefined;
  } catch {
    return undefined;
  }
}
