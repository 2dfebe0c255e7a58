/**
 * A small seeded source of numbers from 0 to below 1 (mulberry32, public domain algorithm): the same seed gives the same sequence.
 * For simulation and tests only, never for secrets.
 *
 * @example const random = seededRandom(7); random() === seededRandom(7)() // true
 */
export function seededRandom(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed = (mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61)) ^ mixed;
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 4294967296;
  };
}

/** A number of the standard normal distribution from two uniform ones (Box and Muller 1958). */
export function normalFrom(random: () => number): number {
  return Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
}
