import type { PersonRow } from '../../../shared/api/people.js';
import { BadInputError } from '../../../shared/errors.js';
import type { Api } from '../../api/api-client.js';

const LARGEST_PAGE = 200;

/** Everybody on the shop's books, in the order in which they were added. */
export async function everybody(api: Api): Promise<PersonRow[]> {
  const people: PersonRow[] = [];
  let cursor: string | undefined;
  do {
    const page = await api.call('listPeople', { query: { limit: LARGEST_PAGE, cursor } });
    people.push(...page.items);
    cursor = page.next;
  } while (cursor !== undefined);
  return people;
}

/** Whom somebody means by an e-mail address, an id, a name, or a part of a name that is nobody else's. */
export async function findPerson(api: Api, text: string): Promise<PersonRow> {
  const people = await everybody(api);
  const wanted = text.trim().toLowerCase();
  const exact = people.filter(({ id, email, name }) => [id, email.toLowerCase(), name.toLowerCase()].includes(wanted));
  const found = exact.length > 0 ? exact : people.filter(({ name }) => name.toLowerCase().includes(wanted));
  const [person, ...others] = found;
  if (!person) throw new BadInputError(`there is nobody like '${text}' here: refettle person list shows everybody`);
  if (others.length > 0)
    throw new BadInputError(
      `'${text}' may be ${found.map(({ name, email }) => `${name} (${email})`).join(' or ')}: give the e-mail address`,
    );
  return person;
}
