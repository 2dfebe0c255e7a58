// A shared bench of the test shop, and people who sign on at it.
import { hash } from '@node-rs/argon2';
import type { AtBench, SignedInPerson, TestServer } from './test-server.js';

/** No test depends on which; good only in tests. */
export const PIN = '2580';

/** argon2id as cheap as it can be: what it guards in a test is nothing. */
export const cheapHash = (secret: string): Promise<string> => hash(secret, { algorithm: 2, memoryCost: 8, timeCost: 1, parallelism: 1 });

export interface TestBench {
  id: string;
  name: string;
  token: string;
}

let count = 0;
export async function makeBench(server: TestServer, name = `test bench ${String((count += 1))}`): Promise<TestBench> {
  const { bench, token } = await server.ok('createBench', { as: server.people.lead, body: { name } });
  return { id: bench.id, name: bench.name, token };
}

export async function givePin(server: TestServer, person: SignedInPerson, pin = PIN): Promise<void> {
  await server.deps
    .db('people')
    .where({ id: person.id })
    .update({ pin_hash: await cheapHash(pin), pin_set_at: server.time.now, pin_set_by: person.id });
}

/** The bench alone, with nobody signed on. */
export const benchAlone = ({ token }: TestBench): AtBench => ({ token, person: undefined });

/** Somebody signs on at the bench by PIN; what the bench then sends for that person. */
export async function standsAt(server: TestServer, bench: TestBench, person: SignedInPerson): Promise<AtBench> {
  await givePin(server, person);
  await server.ok('signOnAtBench', { as: benchAlone(bench), body: { person: person.id, pin: PIN } });
  return { token: bench.token, person: person.id };
}
