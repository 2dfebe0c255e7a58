// The commands about people, sessions and the audit log, in their three forms: see command-forms.ts.
import { z } from 'zod';
import { auditRowSchema } from '../../shared/api/audit.js';
import { madeLinkSchema, personRowSchema, sessionRowSchema } from '../../shared/api/people.js';
import { cheapHash } from './shared-bench.js';
import type { CommandForm, FormShop } from './command-forms.js';

let count = 0;
const somebody = async ({ server }: FormShop): Promise<string> =>
  (await server.addPerson('technician', `Form Person ${String((count += 1))}`)).email;
const emailOfNobody = (): string => `form-${String((count += 1))}@millrace.example`;
const OLD_PASSWORD = 'the old long password';

export const PEOPLE_FORMS: Record<string, CommandForm> = {
  'person list': {
    as: 'admin',
    call: () => [],
    json: z.strictObject({ items: z.array(personRowSchema).min(1) }),
    wrong: ['everybody'],
    says: /^Name +Role +State +Last here( +E-mail)?$/m,
  },
  'person invite': {
    as: 'admin',
    call: () => [emailOfNobody(), '--name', 'Tamsin Oake', '--role', 'technician'],
    json: madeLinkSchema,
    wrong: ['--role', 'owner'],
    says: /^ {2}https:\S+\/link#[\w-]{43}$/m,
    colour: false,
  },
  'person role': {
    as: 'admin',
    call: async (shop) => [await somebody(shop), 'lead'],
    json: personRowSchema,
    wrong: ['somebody@millrace.example', 'owner'],
    says: /^Form Person \d+ is lead from now on\.$/m,
    colour: false,
  },
  'person deactivate': {
    as: 'admin',
    call: async (shop) => [await somebody(shop), '--reason', 'works elsewhere now'],
    json: personRowSchema,
    wrong: [],
    says: /^Form Person \d+ is deactivated: every session has ended/m,
    colour: false,
  },
  'person activate': {
    as: 'admin',
    call: async (shop) => {
      const email = await somebody(shop);
      await shop.server.deps.db('people').where({ email }).update({ active: false });
      return [email];
    },
    json: personRowSchema,
    wrong: [],
    says: /^Form Person \d+ is back, and signs in with the password of before\.$/m,
    colour: false,
  },
  'person reset-password': {
    as: 'admin',
    call: async (shop) => [await somebody(shop)],
    json: madeLinkSchema,
    wrong: [],
    says: /^By this link Form Person \d+ sets a new password, once, until [\s\S]+\/link#[\w-]{43}$/m,
    colour: false,
  },
  'session list': {
    call: () => [],
    json: z.strictObject({ items: z.array(sessionRowSchema).min(1) }),
    wrong: ['--person'],
    says: /^Session +From +Last used +Until$/m,
  },
  'session revoke': {
    call: () => ['--all'],
    json: z.strictObject({ ended: z.number() }),
    wrong: [],
    says: /^(Ended \d+ sessions?|There was none to end)\.$/m,
    colour: false,
  },
  password: {
    as: 'sales',
    call: async ({ server, form }) => {
      await server.deps
        .db('people')
        .where({ role: 'sales' })
        .whereNot({ id: server.people.sales.id })
        .update({ password_hash: await cheapHash(OLD_PASSWORD) });
      return form.startsWith('terminal') ? [] : ['--stdin'];
    },
    input: `${OLD_PASSWORD}\na new long password\n`,
    keys: [
      ['Old password', `${OLD_PASSWORD}\r`],
      ['New password', 'a new long password\r'],
      ['The new one again', 'a new long password\r'],
    ],
    json: z.strictObject({ changed: z.literal(true), sessionsEnded: z.number() }),
    wrong: ['written-where-everybody-sees-it'],
    says: /^The password is changed\./m,
    colour: false,
  },
  audit: {
    as: 'admin',
    call: () => ['--what', 'sheet.added', '--limit', '2'],
    json: z.strictObject({ items: z.array(auditRowSchema).min(1), more: z.boolean() }),
    wrong: ['--what', 'nothing.known'],
    says: /added a service sheet: Heron H6/,
  },
};
