// The commands of a shared bench, in their three forms: see command-forms.ts.
import { z } from 'zod';
import { keepBench } from '../../cli/bench/joined-bench.js';
import { setBenchToken } from '../../server/auth/bench-store.js';
import { personRefSchema } from '../../shared/history/events.js';
import type { CommandForm, FormShop } from './command-forms.js';
import { givePin, makeBench, PIN } from './shared-bench.js';

let count = 0;
const TOKENS = new WeakMap<FormShop['server'], Promise<string>>();
/** Standard input is fixed before the row is called, so the token is too. */
const FIXED_TOKEN = `bench_${'A'.repeat(43)}`;

async function fixedTokenIn({ server }: FormShop): Promise<string> {
  const known =
    TOKENS.get(server) ??
    makeBench(server, 'bench of the forms').then(async ({ id }) => {
      await setBenchToken(server.deps.db, id, FIXED_TOKEN);
      return FIXED_TOKEN;
    });
  TOKENS.set(server, known);
  return known;
}

async function joined(shop: FormShop): Promise<void> {
  const made = await makeBench(shop.server, `form bench ${String((count += 1))}`);
  const { context } = shop.bench;
  keepBench(context.home, { server: context.server, bench: { id: made.id, name: made.name }, token: made.token });
  await givePin(shop.server, shop.server.people.technician);
}

const bench = z.strictObject({ id: z.string(), name: z.string() });

export const BENCH_FORMS: Record<string, CommandForm> = {
  'bench join': {
    as: null,
    call: async (shop) => {
      await fixedTokenIn(shop);
      return shop.form.startsWith('terminal') ? [] : ['--token-stdin'];
    },
    input: `${FIXED_TOKEN}\n`,
    keys: [['token', `${FIXED_TOKEN}\r`]],
    json: z.strictObject({ server: z.url(), bench, shop: z.string(), rig: z.null() }),
    wrong: ['bench_written-where-everybody-sees-it'],
    says: /^This computer is the shared bench bench of the forms of Millrace Mend, at http:\S+\.$/m,
    colour: false,
  },
  'bench show': {
    as: null,
    call: async (shop) => (await joined(shop), []),
    json: z.object({ server: z.url(), offline: z.literal(false), bench, signedOn: z.null(), people: z.array(z.unknown()), rig: z.null() }),
    wrong: ['bench-1'],
    says: /^signed on +nobody: whoever begins something is asked$/m,
    colour: false,
  },
  'bench sign-on': {
    as: null,
    call: async (shop) => {
      await joined(shop);
      return [shop.server.people.technician.email, ...(shop.form.startsWith('terminal') ? [] : ['--pin-stdin'])];
    },
    input: `${PIN}\n`,
    keys: [['PIN', `${PIN}\r`]],
    json: z.strictObject({ bench, person: personRefSchema, until: z.iso.datetime() }),
    wrong: ['--pin', '2580'],
    says: /^Signed on at form bench \d+: Wil Tarrow, technician\.$/m,
    colour: false,
  },
  'bench leave': {
    as: null,
    call: async (shop) => (await joined(shop), []),
    json: z.strictObject({ server: z.url(), left: bench, waiting: z.literal(0) }),
    wrong: ['bench-1'],
    says: /^This computer is no longer the bench form bench \d+\./m,
    colour: false,
  },
};
