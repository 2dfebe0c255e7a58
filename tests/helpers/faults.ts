// How many faults a test makes, and from which seed: few of them each time, the full count when it is asked for.
import { seededRandom } from '../../shared/lamps/seeded-random.js';

export interface Faults {
  count: number;
  seed: number;
  random: () => number;
  /** A whole number from 0 on, below this. */
  below: (limit: number) => number;
}

/** `REFETTLE_FAULTS=200 REFETTLE_SEED=7`: that many, from that seed. The seed is printed, so that what went wrong can be had again. */
export function faults(what: string, usual: number): Faults {
  const count = Number(process.env['REFETTLE_FAULTS'] ?? usual);
  const seed = Number(process.env['REFETTLE_SEED'] ?? Math.floor(Math.random() * 1e9));
  const random = seededRandom(seed);
  process.stdout.write(`${what}: ${String(count)} from seed ${String(seed)} (REFETTLE_FAULTS, REFETTLE_SEED)\n`);
  return { count, seed, random, below: (limit) => Math.floor(random() * limit) };
}
