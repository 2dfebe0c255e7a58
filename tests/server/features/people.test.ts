import { afterAll, beforeAll, expect, test } from 'vitest';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
});
afterAll(() => server.close());

const person = { email: 'tamsin@millrace.example', name: 'Tamsin Oake', role: 'technician', password: 'a mill race in March' };

test('When an admin adds a person, then that person can sign in, and nobody else gets the address', async () => {
  const added = await server.ok('createPerson', { as: server.people.admin, body: person });
  expect(added).toMatchObject({ name: 'Tamsin Oake', role: 'technician' });
  expect((await server.ok('signIn', { body: { email: person.email, password: person.password } })).user).toEqual(added);
  const again = await server.send('createPerson', { as: server.people.admin, body: { ...person, email: 'TAMSIN@millrace.example' } });
  expect(problemIn(again)).toMatchObject({ status: 409, kind: 'conflict' });
});

test('When the form is wrong, then each field says why, and the password is not echoed', async () => {
  const response = await server.send('createPerson', {
    as: server.people.admin,
    body: { email: 'x', name: '', role: 'owner', password: 'short-one' },
  });
  expect(problemIn(response).errors?.map(({ pointer }) => pointer)).toEqual(['/email', '/name', '/role', '/password']);
  expect(response.text).not.toContain('short-one');
});

test('When the people are listed, then each comes once and without a trace of a password', async () => {
  const seen: string[] = [];
  let cursor: string | undefined;
  do {
    const response = await server.send('listPeople', {
      as: server.people.admin,
      query: { limit: 2, ...(cursor === undefined ? {} : { cursor }) },
    });
    expect(response.text).not.toMatch(/argon2|password/);
    const page = response.body as { items: { email: string }[]; next?: string };
    seen.push(...page.items.map(({ email }) => email));
    cursor = page.next;
  } while (cursor !== undefined);
  expect(new Set(seen).size).toBe(seen.length);
  expect(seen).toHaveLength(6);
});
