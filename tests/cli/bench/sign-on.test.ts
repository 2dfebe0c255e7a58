import { hash } from '@node-rs/argon2';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { keepBench } from '../../../cli/bench/joined-bench.js';
import { knownPeople, rememberPerson } from '../../../cli/bench/known-people.js';
import { PIN_LOCK, signOnAs } from '../../../cli/bench/sign-on.js';
import { takeLock } from '../../../cli/journal/lock.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { wil } from '../../helpers/unit-facts.js';

/** Cheap, for a test: the bench keeps what the server made, whatever it cost. */
const verifier = await hash('2468', { memoryCost: 1024, timeCost: 1 });

/** A shared bench whose server is away, and which has seen Wil Tarrow. */
let bench: BenchTerminal;
beforeEach(() => {
  bench = benchTerminal();
  const { home, server } = bench.context;
  keepBench(home, { server, bench: { id: 'bench-2', name: 'Bench 2' }, token: 'a token for the test' });
  rememberPerson(home, { ...wil, pinSetAt: '2026-03-01T09:00:00Z' }, verifier);
});
afterEach(() => bench.remove());

const signOn = (pin: string) => signOnAs(bench.context, { person: wil.id }, pin);
const triesCounted = (): number => knownPeople(bench.context.home)[0]?.wrong?.tries ?? 0;

test('When PINs are tried without the server, then each counts, the fourth waits, and the right one starts anew', async () => {
  for (const pin of ['0000', '1111']) await expect(signOn(pin)).rejects.toThrow('The PIN is wrong');
  expect(triesCounted()).toBe(2);
  expect(await signOn('2468')).toMatchObject({ id: wil.id });
  expect(triesCounted()).toBe(0);
  for (const pin of ['0000', '1111', '2222']) await expect(signOn(pin)).rejects.toThrow('The PIN is wrong');
  await expect(signOn('2468')).rejects.toThrow('Too many wrong PINs');
});

test('When another terminal is looking at a PIN, then this one looks at none, and takes no try', async () => {
  const lock = await takeLock(bench.context, PIN_LOCK, { what: 'sign-on' });
  await expect(signOn('2468')).rejects.toThrow('Somebody else is just signing on');
  expect(triesCounted()).toBe(0);
  if ('release' in lock) lock.release();
  expect(await signOn('2468')).toMatchObject({ id: wil.id });
});
