import { v7 as newId } from 'uuid';
import { hashPassword } from '../../auth/password.js';
import { insertPerson, listPeople } from '../../auth/people-store.js';
import { ConflictError } from '../../errors.js';
import { cursorOf, pageOf, uuidCursor } from '../../paging.js';
import type { RegisterRoute } from '../../route.js';

export function registerPeopleRoutes(route: RegisterRoute): void {
  route('listPeople', async ({ query, trx }) => {
    const people = await listPeople(trx, uuidCursor(query.cursor), query.limit + 1);
    return pageOf(people, query.limit, (person) => cursorOf(person.id));
  });

  route('createPerson', async ({ body, trx, now }) => {
    const person = { id: newId(), email: body.email, name: body.name, role: body.role };
    const added = await insertPerson(trx, { ...person, passwordHash: await hashPassword(body.password), createdAt: now });
    if (!added) throw new ConflictError('Somebody has this e-mail address already.', 'Use another address, or that account.');
    return person;
  });
}
