// One row a command of the tree: how it is called so that it answers, how it is used wrongly, and what its JSON looks like.
// tests/server/cli/three-forms.test.ts walks the tree and runs each row as a pipe, as JSON and at a terminal.
// A new command: add its row here (or a file of rows beside this one, spread into COMMAND_FORMS).
import { z } from 'zod';
import { userSchema } from '../../shared/api/sessions.js';
import { sheetPageSchema, sheetRowSchema } from '../../shared/api/sheets.js';
import { tagPageSchema } from '../../shared/api/tags.js';
import type { Role } from '../../shared/api/roles.js';
import { unitPageSchema, unitRowSchema, unitSchema } from '../../shared/api/units.js';
import { decodeAnswerSchema } from '../../shared/decode/answer.js';
import { repairBodySchema, unitEventSchema } from '../../shared/history/events.js';
import { judgementSchema } from '../../shared/measure/judge.js';
import { verdictSchema } from '../../shared/verdict.js';
import { BENCH_FORMS } from './bench-forms.js';
import { runProgram } from '../../cli/program.js';
import { benchTerminal, type BenchTerminal } from './bench-terminal.js';
import { newUnit, shopFileText, takeIn } from './factories.js';
import { examplePath } from './fixtures.js';
import { PEOPLE_FORMS } from './people-forms.js';
import type { TestServer } from './test-server.js';

export type Form = 'pipe' | 'JSON' | 'terminal' | 'terminal without colour';

/** What a row may use: the test's server and what was made on it before; `bench` is a new one for each form, its home is its own. */
export interface FormShop {
  server: TestServer;
  /** Is on the books, nothing was tested. */
  unit: string;
  /** Has a tag that stands. */
  readyUnit: string;
  bench: BenchTerminal;
  form: Form;
  /** Writes a file in the bench's home and gives its path. */
  write: (name: string, text: string) => string;
  /** Another command first, on the same bench, as whoever is signed in there. */
  run: (args: string[]) => Promise<void>;
}

export interface CommandForm {
  /** Arguments and options behind the command's name. `--json` is added by the test. */
  call: (shop: FormShop) => string[] | Promise<string[]>;
  /** Who is signed in; a technician unless told, `null`: nobody. */
  as?: Role | null;
  /** Of every form; 0 unless told. */
  code?: number;
  /** What the one JSON value on standard output holds; `null` and a reason: the command has no `--json`. */
  json: z.ZodType | { none: string };
  /** Arguments with which it is used wrongly; `null` and a reason where nothing can be wrong. */
  wrong: string[] | { none: string };
  /** What stands in the answer for people, in every other form. */
  says: RegExp;
  /** False: its answer for people has nothing bold or coloured in it. */
  colour?: boolean;
  /** What is on standard input in the pipe forms. */
  input?: string;
  /** At a terminal: what is pressed when standard error says something. */
  keys?: readonly (readonly [says: string, press: string])[];
}

const NUMBER_WRONG = ['twelve'];
const sent = z.literal(true);

/** A script that needs a second: one question, answered by the simulated rig. */
const QUICK_SCRIPT = `format: refettle.script
version: 1
name: quick-look
title: A quick look
family: heron-h6
steps:
  - {id: visual, kind: inspect, title: Visual check, check: visual}
`;

/** A run of the quick script on a unit of its own, begun at this bench's terminal and parked at its only step; gives the unit's number. */
async function parkedRun({ server, bench, write }: FormShop): Promise<string> {
  const unit = String((await takeIn(server)).number);
  const { REFETTLE_SERVER = '' } = bench.context.env;
  const before = benchTerminal({ home: bench.home, terminal: true, env: { REFETTLE_SERVER } }).when('park', 'k');
  await runProgram(['run', write('quick-look.yaml', QUICK_SCRIPT), unit, '--rig', 'sim:heron-good'], before.context);
  return unit;
}

export const COMMAND_FORMS: Record<string, CommandForm> = {
  ...BENCH_FORMS,
  ...PEOPLE_FORMS,
  'sign-in': {
    as: null,
    call: ({ server, form }) => [server.people.sales.email, ...(form.startsWith('terminal') ? [] : ['--password-stdin'])],
    input: 'a password for the test\n',
    keys: [['Password', 'a password for the test\r']],
    json: z.strictObject({ server: z.url(), user: userSchema }),
    wrong: ['--password', 'written-where-everybody-sees-it'],
    says: /^Signed in at http:\S+ as Odile Finch, sales\.$/m,
    colour: false,
  },
  'sign-out': {
    call: () => [],
    json: z.strictObject({ signedOut: z.literal(true), revoked: z.literal(true) }),
    wrong: ['everybody'],
    says: /^Signed out\.$/m,
    colour: false,
  },
  whoami: {
    call: () => [],
    json: z.object({ server: z.url(), offline: z.literal(false), user: userSchema }),
    wrong: ['--loud'],
    says: /^Wil Tarrow \d+, technician, /m,
    colour: false,
  },
  'unit new': {
    call: () => {
      const { plate, appliance, complaint } = newUnit();
      const { maker, model, serial = '' } = plate;
      return ['--appliance', appliance, '--maker', maker, '--model', model, '--serial', serial, '--class', 'I', '--complaint', complaint];
    },
    json: unitSchema,
    wrong: ['--volts', 'many'],
    says: /^No\. \d{4} {2}Brindle BW 714, washing machine, taken in\.$/m,
  },
  'unit show': {
    call: ({ unit }) => [unit],
    json: unitPageSchema,
    wrong: NUMBER_WRONG,
    says: /No power yet/,
  },
  'unit family': {
    call: async ({ server }) => {
      const { family: _none, ...without } = newUnit();
      const unit = await server.ok('takeInUnit', { as: server.people.technician, body: without });
      return [String(unit.number), 'heron-h6'];
    },
    json: unitSchema,
    wrong: ['0412'],
    says: /goes by the sheet of heron-h6 from now on\.$/m,
    colour: false,
  },
  'unit list': {
    call: () => ['--limit', '3'],
    json: z.strictObject({ items: z.array(unitRowSchema).min(1), more: z.boolean() }),
    wrong: ['--stage', 'lost'],
    says: /^No\. +Machine +Stage/m,
  },
  'sheet check': {
    as: null,
    call: () => [examplePath('heron-h6.yaml')],
    json: z.strictObject({
      file: z.string(),
      good: z.literal(true),
      family: z.string(),
      edition: z.number(),
      findings: z.array(z.unknown()),
    }),
    wrong: [],
    says: /It holds together\.$/m,
    colour: false,
  },
  'sheet add': {
    as: 'lead',
    call: ({ write, form }) => {
      const family = `plover-${form.replaceAll(' ', '-').toLowerCase()}`;
      return [write('sheet.yaml', shopFileText('heron-h6.yaml').replace('family: heron-h6', `family: ${family}`))];
    },
    json: sheetRowSchema,
    wrong: [],
    says: /, edition \d+, is in the shop\.$/m,
    colour: false,
  },
  'sheet show': {
    call: () => ['heron-h6'],
    json: sheetPageSchema,
    wrong: [],
    says: /^format: refettle\.sheet$/m,
    colour: false,
  },
  capture: {
    call: ({ unit }) => [unit, '--file', examplePath('captures/01-one-code.lamps.ndjson')],
    json: z.object({ id: z.uuid(), unit: z.number(), sent, ...decodeAnswerSchema.shape }),
    wrong: ['0412', '--seconds', 'long'],
    says: /Written down here, and sent\.$/m,
  },
  measure: {
    call: ({ unit }) => [unit, 'visual', '--verdict', 'pass'],
    json: z.object({ unit: z.number(), check: z.literal('visual'), verdict: z.literal('pass'), sent }),
    wrong: ['0412'],
    says: /Visual check {2}■ pass$/m,
  },
  repair: {
    call: async ({ server }) => [String((await takeIn(server)).number), '--part', 'Drain pump', '--source', 'new', '--minutes', '30'],
    json: z.strictObject({ id: z.uuid(), unit: z.number(), repair: repairBodySchema, sent }),
    wrong: ['0412', '--minutes', 'some'],
    says: /mended: Drain pump/,
    colour: false,
  },
  override: {
    as: 'lead',
    call: ({ unit }) => [unit, '--reason', 'tried on the isolating transformer'],
    json: unitEventSchema,
    wrong: NUMBER_WRONG,
    says: /Maren Holt \d+ opened the dead-test gate/,
    colour: false,
  },
  run: {
    call: ({ unit, write }) => [write('quick-look.yaml', QUICK_SCRIPT), unit, '--rig', 'sim:heron-good', '--unattended'],
    json: z.object({
      run: z.uuid(),
      unit: z.number(),
      script: z.literal('quick-look'),
      verdict: verdictSchema,
      sent,
      steps: z.array(z.unknown()),
    }),
    wrong: ['h6-find.yaml'],
    says: /Ended ■ pass/,
  },
  sync: {
    call: () => ['--status'],
    json: z.strictObject({ sent: z.array(z.unknown()), left: z.array(z.unknown()) }),
    wrong: ['--drop'],
    says: /^Nothing waits on this bench\.$/m,
    colour: false,
  },
  tag: {
    call: ({ readyUnit }) => [readyUnit],
    json: z.object({ unit: z.number(), ready: z.literal(true), tag: tagPageSchema }),
    wrong: NUMBER_WRONG,
    says: /READY/,
  },
  decode: {
    as: null,
    call: () => ['--sheet', examplePath('heron-h6.yaml'), examplePath('captures/01-one-code.lamps.ndjson')],
    json: z.object({ file: z.string(), ...decodeAnswerSchema.shape }),
    wrong: ['a.lamps.ndjson'],
    says: /G5K3/,
    colour: false,
  },
  judge: {
    as: null,
    // Contract, section 4: the example.
    call: () => ['--value', '12.41k', '--unit', 'ohm', '--low', '11.4k', '--high', '12.6k', '--accuracy', '0.8%+3', '--resolution', '10'],
    json: judgementSchema,
    wrong: ['--value', '1'],
    says: /pass/,
    colour: false,
  },
  runs: {
    call: () => [],
    json: z.strictObject({ runs: z.array(z.unknown()), unreadable: z.array(z.string()) }),
    wrong: ['everywhere'],
    says: /^No run is open on this bench/m,
    colour: false,
  },
  'rig show': {
    as: null,
    call: () => ['--rig', 'sim:heron-good'],
    json: z.object({ file: z.null(), simulated: z.literal(true), instruments: z.array(z.unknown()) }),
    wrong: ['--rig'],
    says: /heron-good/,
  },
  label: {
    call: ({ unit, bench }) => [unit, '--code', 'bars', '--pdf', `${bench.home}/label.pdf`],
    json: z.object({ unit: z.number(), kind: z.literal('stock'), says: z.array(z.string()) }),
    wrong: NUMBER_WRONG,
    says: /Brindle/,
    colour: false,
  },
  resume: {
    call: async (shop) => [await parkedRun(shop), '--rig', 'sim:heron-good', '--unattended'],
    json: z.object({ run: z.uuid(), unit: z.number(), script: z.literal('quick-look'), verdict: z.literal('pass'), sent }),
    wrong: ['0412'],
    says: /Ended ■ pass/,
  },
  abandon: {
    call: async (shop) => [await parkedRun(shop), '--reason', 'the machine was sold for parts'],
    json: z.object({ run: z.uuid(), unit: z.number(), script: z.literal('quick-look'), reason: z.string(), sent }),
    wrong: ['0412', '--reason', 'there is no such run'],
    says: /quick-look/,
    colour: false,
  },
  'rig check': {
    as: null,
    // No port of this name is on any machine: it is asked, and says so.
    call: () => ['--port', '/dev/refettle-no-such-port'],
    code: 4,
    json: z.strictObject({
      ports: z.tuple([
        z.strictObject({ port: z.literal('/dev/refettle-no-such-port'), state: z.literal('not there'), why: z.string(), toDo: z.string() }),
      ]),
      instruments: z.tuple([]),
      unclear: z.tuple([]),
      missing: z.tuple([]),
      rigFile: z.string().endsWith('rig.yaml'),
      differs: z.literal(false),
      written: z.literal(false),
    }),
    wrong: ['--port'],
    says: /refettle-no-such-port/,
  },
  completion: {
    as: null,
    call: () => ['bash'],
    json: z.strictObject({ shell: z.literal('bash'), script: z.string().includes('complete -F') }),
    wrong: ['csh'],
    says: /^complete -F _refettle refettle$/m,
    colour: false,
  },
};
