import type { BenchPerson } from '../../shared/api/benches.js';
import type { Shop } from '../../shared/api/sessions.js';
import type { PersonRef } from '../../shared/history/events.js';
import type { Context } from '../context.js';
import { ApiProblemError, NobodyToAskError, ServerUnreachableError, SignOnRefusedError } from '../errors.js';
import { takeLock } from '../journal/lock.js';
import { personOf, whoIsSignedIn } from '../session.js';
import { benchView, joinedBench, type JoinedBench } from './joined-bench.js';
import { keepSignOn, standingHere } from './kept-sign-on.js';
import { reportRigOf } from './report-rig.js';
import { countTry, forgetTries, knownPeople, rememberPerson, waitBeforeTry } from './known-people.js';

/** What somebody signs on for: a run asks each time it is begun or resumed, a single command only when nobody stands here. */
export type SignOnWhen = 'start' | 'resume' | 'command';

const WHY: Record<SignOnWhen, string> = {
  start: 'Who begins this run',
  resume: 'Who goes on with this run',
  command: 'Who are you',
};
const SOMEBODY_ELSE = '';
/** A slip of the finger, twice. */
const TRIES = 3;

/**
 * Who does the work that begins now. On a shared bench somebody signs on by name and PIN; on a bench of one's own it is who is signed in.
 * Refuses (NotSignedInError) where nobody is signed in, (NobodyToAskError) where nobody is there to be asked for a PIN,
 * (SignOnRefusedError) whose PIN is wrong.
 */
export async function signOn(context: Context, when: SignOnWhen): Promise<PersonRef> {
  const joined = joinedBench(context.home, context.server);
  if (!joined) return personOf((await whoIsSignedIn(context)).user);
  const standing = standingHere(context, joined.bench.id);
  // Where nobody can be asked, a sign-on that still holds is an answer: refettle bench sign-on gives one.
  const person = standing && (when === 'command' || !context.interactive) ? standing : await askWho(context, joined, when);
  keepSignOn(context, joined.bench.id, person);
  return person;
}

/** For a write that the server alone answers: on a shared bench somebody must stand there; elsewhere the server says who is signed in. */
export async function signOnIfShared(context: Context): Promise<void> {
  if (joinedBench(context.home, context.server)) await signOn(context, 'command');
}

/** Who stands at this shared bench, asked for where nobody does, and the shop. */
export async function whoStandsHere(
  context: Context,
  joined: JoinedBench,
): Promise<{ user: PersonRef; shop: Shop; bench: JoinedBench['bench']; offline: boolean }> {
  const user = await signOn(context, 'command');
  const { shop, offline } = await benchView(context);
  return { user, shop, bench: joined.bench, offline };
}

/** Asks at the terminal who it is, and for the PIN, a few times over. */
export async function askWho(context: Context, joined: JoinedBench, when: SignOnWhen): Promise<PersonRef> {
  if (!context.interactive)
    throw new NobodyToAskError(
      `This is the shared bench ${joined.bench.name}. ${WHY[when]}?`,
      'sign on first with refettle bench sign-on NAME --pin-stdin, or run it at a terminal',
    );
  const { people, offline } = await benchView(context);
  if (offline) context.stderr.say('The server can’t be reached: those whom this bench has seen can sign on all the same.');
  for (let tries = 1; ; tries += 1) {
    const who = await askName(context, when, people);
    const pin = await context.prompt.secret({ message: 'PIN', instead: 'give it on standard input with --pin-stdin' });
    try {
      const person = await signOnAs(context, who, pin);
      if (!offline) await reportRigOf(context);
      return person;
    } catch (error) {
      if (!(error instanceof SignOnRefusedError) || !error.tryAgain || tries === TRIES) throw error;
      context.stderr.say(`${error.message} ${error.remedy}`);
    }
  }
}

async function askName(context: Context, when: SignOnWhen, people: readonly BenchPerson[]): Promise<{ person: string } | { name: string }> {
  const instead = 'name it: refettle bench sign-on NAME --pin-stdin';
  const id =
    people.length === 0
      ? SOMEBODY_ELSE
      : await context.prompt.choice({
          message: WHY[when],
          choices: [...people.map(({ id, name }) => ({ value: id, name })), { value: SOMEBODY_ELSE, name: 'somebody else' }],
          instead,
        });
  if (id !== SOMEBODY_ELSE) return { person: id };
  const refuse = (text: string): string | undefined => (text === '' ? 'type your name' : undefined);
  return { name: await context.prompt.text({ message: people.length === 0 ? `${WHY[when]}: your name` : 'Your name', refuse, instead }) };
}

/** Checks a PIN: at the server, or while that is away against what this bench keeps of those whom it has seen. */
export async function signOnAs(context: Context, who: { person: string } | { name: string }, pin: string): Promise<PersonRef> {
  try {
    const { person, verifier } = await (await context.api()).call('signOnAtBench', { body: { ...who, pin } });
    rememberPerson(context.home, person, verifier);
    return personOf(person);
  } catch (error) {
    if (error instanceof ServerUnreachableError) return signOnOffline(context, who, pin, error);
    if (error instanceof ApiProblemError && error.status === 422)
      throw new SignOnRefusedError('The name or the PIN is wrong, or no PIN is set.', {
        remedy: 'Try again. You set your PIN in the browser, under your account; a lead can set it for you.',
        tryAgain: true,
      });
    throw error;
  }
}

async function signOnOffline(
  context: Context,
  who: { person: string } | { name: string },
  pin: string,
  away: ServerUnreachableError,
): Promise<PersonRef> {
  const { home } = context;
  const people = knownPeople(home);
  const named = people.filter(({ person }) => ('person' in who ? person.id === who.person : sameName(person.name, who.name)));
  const [known] = named;
  if (!known || named.length > 1) {
    const names = people.map(({ person }) => person.name);
    throw new SignOnRefusedError(
      known ? 'Two have this name.' : 'This bench does not know that person well enough to check a PIN without the server.',
      {
        remedy: known
          ? 'Choose from the list.'
          : `${names.length > 0 ? `It knows ${names.join(', ')}. ` : ''}Others sign on once while the server can be reached. ${away.message}`,
        tryAgain: names.length > 0,
      },
    );
  }
  // One after another: two who read the count at the same moment would share a try.
  const lock = await takeLock(context, PIN_LOCK, { what: 'sign-on' });
  if ('owner' in lock)
    throw new SignOnRefusedError('Somebody else is just signing on at this bench.', { remedy: 'Try again.', tryAgain: true });
  try {
    await checkPin(context, known.person.id, pin);
  } finally {
    lock.release();
  }
  return personOf(known.person);
}

export const PIN_LOCK = 'pin';

/** Holds a PIN against what this bench keeps, and counts the try. Whoever asks holds the lock. */
async function checkPin(context: Context, personId: string, pin: string): Promise<void> {
  const { home } = context;
  const now = context.now();
  // Read again: others may have tried meanwhile, or this person may be known no longer.
  const known = knownPeople(home).find(({ person }) => person.id === personId);
  const waitMs = known ? waitBeforeTry(known, now) : 0;
  if (known && waitMs > 0)
    throw new SignOnRefusedError(`Too many wrong PINs for ${known.person.name}.`, {
      remedy: `Wait ${Math.ceil(waitMs / 1000)} seconds, then try again.`,
      tryAgain: false,
    });
  countTry(home, personId, now);
  const { verify } = await import('@node-rs/argon2');
  if (!known || !(await verify(known.verifier, pin)))
    throw new SignOnRefusedError('The PIN is wrong.', { remedy: 'Try again; each wrong one makes the wait longer.', tryAgain: true });
  forgetTries(home, personId);
}

const sameName = (one: string, other: string): boolean => plain(one) === plain(other);
const plain = (name: string): string => name.trim().toLowerCase().replace(/\s+/g, ' ');
