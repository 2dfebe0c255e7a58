import { rmSync } from 'node:fs';
import { z } from 'zod';
import { benchPersonSchema, type BenchPerson, type OwnBench } from '../../shared/api/benches.js';
import { readIfThere, writeWhole, type Home } from '../home.js';
import { parseJson } from '../session.js';

const FILE = 'bench-people.json';

const knownSchema = z.strictObject({
  person: benchPersonSchema,
  /** argon2id of the PIN, made for this bench by the server. */
  verifier: z.string(),
  /** Wrong PINs in a row since the last right one. */
  wrong: z.strictObject({ tries: z.number().int(), lastAt: z.iso.datetime() }).optional(),
});
/** Somebody whom this bench has seen: who can sign on here while the network is away. */
export type KnownPerson = z.infer<typeof knownSchema>;

/** Slips of the finger cost nothing. */
const FREE_TRIES = 3;
const FIRST_WAIT_MS = 30_000;
/** Ten thousand PINs of four digits at four an hour: a hundred days. */
const LONGEST_WAIT_MS = 15 * 60_000;

export function knownPeople(home: Home): KnownPerson[] {
  const parsed = z.array(knownSchema).safeParse(parseJson(readIfThere(home.path(FILE)) ?? '[]'));
  return parsed.success ? parsed.data : [];
}

const keep = (home: Home, people: readonly KnownPerson[]): void => writeWhole(home.path(FILE), `${JSON.stringify(people, null, 2)}\n`);

export function forgetPeople(home: Home): void {
  rmSync(home.path(FILE), { force: true });
}

/** The last to sign on stands first. */
export function rememberPerson(home: Home, person: BenchPerson, verifier: string): void {
  keep(home, [{ person, verifier }, ...knownPeople(home).filter((known) => known.person.id !== person.id)]);
}

/** Who no longer works here is forgotten, and so is whose PIN was changed; names and roles are as the server has them now. */
export function keepOnlyOffered(home: Home, { people }: Pick<OwnBench, 'people'>): void {
  const before = knownPeople(home);
  const after = before.flatMap((known) => {
    const person = people.find(({ id }) => id === known.person.id);
    return person && person.pinSetAt === known.person.pinSetAt ? [{ ...known, person }] : [];
  });
  if (JSON.stringify(after) !== JSON.stringify(before)) keep(home, after);
}

/** How long until this person may try again, in milliseconds; 0: now. A clock that was set back starts the wait anew. */
export function waitBeforeTry({ wrong }: KnownPerson, now: Date): number {
  if (!wrong || wrong.tries < FREE_TRIES) return 0;
  const wait = Math.min(FIRST_WAIT_MS * 2 ** (wrong.tries - FREE_TRIES), LONGEST_WAIT_MS);
  const passed = now.getTime() - Date.parse(wrong.lastAt);
  return passed < 0 ? wait : Math.max(0, wait - passed);
}

/** Counted before the PIN is looked at: whoever pulls the plug in between has had the try. */
export function countTry(home: Home, personId: string, now: Date): void {
  keep(
    home,
    knownPeople(home).map((known) =>
      known.person.id === personId ? { ...known, wrong: { tries: (known.wrong?.tries ?? 0) + 1, lastAt: now.toISOString() } } : known,
    ),
  );
}

export function forgetTries(home: Home, personId: string): void {
  keep(
    home,
    knownPeople(home).map(({ wrong, ...known }) => (known.person.id === personId || wrong === undefined ? known : { ...known, wrong })),
  );
}
