// Each command of the tree in its three forms: help, wrong usage, as a pipe, as JSON, at a terminal with and without colour.
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { Help, type Command } from 'commander';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { createProgram, runProgram } from '../../../cli/program.js';
import { hashPassword } from '../../../server/auth/password.js';
import { setPassword } from '../../../server/auth/people-store.js';
import type { Role } from '../../../shared/api/roles.js';
import { benchTerminal, signedIn, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { COMMAND_FORMS, type CommandForm, type Form, type FormShop } from '../../helpers/command-forms.js';
import { addHeron, signedOffUnit, takeIn } from '../../helpers/factories.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type TestServer } from '../../helpers/test-server.js';

// eslint-disable-next-line no-control-regex -- ESC begins a colour
const COLOUR = /\u001b\[[0-9;]*m/;
const PASSWORD = 'a password for the test';

const anyBench = benchTerminal();
const program = createProgram(anyBench.context, () => undefined);
anyBench.remove();
const commands = [...walk(program)].map((command) => ({ name: nameOf(command), command }));
const doing = commands.filter(({ command }) => command.commands.length === 0);
const rows = Object.entries(COMMAND_FORMS).filter(([name]) => doing.some((one) => one.name === name));

function* walk(command: Command): Generator<Command> {
  for (const child of new Help().visibleCommands(command).filter((each) => each.name() !== 'help')) {
    yield child;
    yield* walk(child);
  }
}
function nameOf(command: Command): string {
  return command.parent?.parent ? `${nameOf(command.parent)} ${command.name()}` : command.name();
}

let server: TestServer;
let http: OverHttp;
let address: string;
let people = 0;
let units: { unit: string; readyUnit: string };

beforeAll(async () => {
  server = await startTestServer({ shop: { demo: true } });
  await addHeron(server);
  const { unit: ready } = await signedOffUnit(server);
  server.deps.clock = () => new Date();
  await setPassword(server.deps.db, server.people.sales.id, await hashPassword(PASSWORD), new Date());
  units = { unit: String((await takeIn(server)).number), readyUnit: String(ready.number) };
  http = await overHttp(server.app);
  address = http.address;
});
afterAll(async () => {
  await http.unplug();
  await server.close();
});

interface Outcome {
  code: number;
  stdout: string;
  stderr: string;
}

/** A bench of its own for each form, with somebody of its own signed in: a command may sign them out. */
async function inForm(name: string, form: Form, row: CommandForm): Promise<Outcome> {
  const atTerminal = form.startsWith('terminal');
  const env = { REFETTLE_SERVER: address, NO_COLOR: form === 'terminal without colour' ? '1' : '', TERM: 'xterm' };
  const bench = benchTerminal({ terminal: atTerminal, stdoutTerminal: atTerminal, env });
  try {
    if (row.as !== null) await signInAs(bench, row.as ?? 'technician');
    const shop: FormShop = {
      server,
      ...units,
      bench,
      form,
      write(file, text) {
        const path = join(bench.home, file);
        writeFileSync(path, text);
        return path;
      },
      async run(args) {
        const before = benchTerminal({ home: bench.home, env });
        const code = await runProgram(args, before.context);
        expect(code, `refettle ${args.join(' ')}, before the command itself: ${before.stderr()}`).toBe(0);
      },
    };
    const args = [...name.split(' '), ...(await row.call(shop)), ...(form === 'JSON' ? ['--json'] : [])];
    for (const [says, press] of atTerminal ? (row.keys ?? []) : []) bench.when(says, press);
    const stdin = bench.context.stdin as unknown as { end(text?: string): void };
    if (!atTerminal) stdin.end(row.input ?? '');
    const code = await runProgram(args, bench.context);
    return { code, stdout: bench.stdout(), stderr: bench.stderr() };
  } finally {
    bench.remove();
  }
}

/** Somebody new each time, named like the shop's person of that role: a command may sign them out. */
async function signInAs(bench: BenchTerminal, role: Role): Promise<void> {
  people += 1;
  signedIn(bench, await server.addPerson(role, `${server.people[role].name} ${people}`));
}

describe('The table of forms', () => {
  test('When a command is added to the tree, then it has a row in the table', () => {
    const missing = doing.filter(({ name }) => !(name in COMMAND_FORMS)).map(({ name }) => `refettle ${name}`);
    expect(missing, 'add a row for each of these to COMMAND_FORMS in tests/helpers/command-forms.ts').toEqual([]);
  });

  test('When a command is taken out of the tree, then its row goes too', () => {
    const left = Object.keys(COMMAND_FORMS).filter((name) => !doing.some((one) => one.name === name));
    expect(left, 'take these rows out of COMMAND_FORMS, or name the commands as the tree does').toEqual([]);
  });

  test('When a command answers, then it has --json, or its row says why not', () => {
    const without = doing.filter(({ name, command }) => {
      const json = COMMAND_FORMS[name]?.json;
      return json !== undefined && !('none' in json) !== command.options.some(({ long }) => long === '--json');
    });
    expect(without.map(({ name }) => name)).toEqual([]);
  });
});

describe('Help', () => {
  test.each(commands)('When help is asked of $name, then it exits 0 and names what it takes', async ({ name, command }) => {
    const bench = benchTerminal();
    try {
      expect(await runProgram([...name.split(' '), '--help'], bench.context)).toBe(0);
      expect(bench.stderr()).toBe('');
      const help = bench.stdout();
      expect(help).toContain(`Usage: refettle ${name}`);
      expect(command.description(), 'what it does, in words').not.toBe('');
      for (const { long, description } of command.options) {
        expect(help).toContain(long);
        expect(description, `${long} of ${name}, in words`).not.toBe('');
      }
      for (const argument of command.registeredArguments) {
        expect(help).toContain(argument.name());
        expect(argument.description, `<${argument.name()}> of ${name}, in words`).not.toBe('');
      }
      for (const child of command.commands) expect(help).toMatch(new RegExp(`^ {2}${child.name()}\\b`, 'm'));
      expect(help.split('\n').filter((line) => line.length > 80)).toEqual([]);
    } finally {
      bench.remove();
    }
  });
});

describe('Wrong usage', () => {
  const nouns = commands.filter(({ command }) => command.commands.length > 0);
  const wrongly = [
    ...nouns.map(({ name }) => ({ name: `${name}, without a verb`, args: name.split(' ') })),
    ...nouns.map(({ name }) => ({ name: `${name}, with an unknown verb`, args: [...name.split(' '), 'refurbish'] })),
    ...doing.map(({ name }) => ({ name: `${name}, with an unknown option`, args: [...name.split(' '), '--no-such-option'] })),
    ...rows.flatMap(([name, { wrong }]) => (Array.isArray(wrong) ? [{ name, args: [...name.split(' '), ...wrong] }] : [])),
  ];
  test.each(wrongly)('When it is used wrongly ($name), then it exits 2, says so on standard error, and nothing else', async ({ args }) => {
    const bench = benchTerminal({ env: { REFETTLE_SERVER: address, NO_COLOR: '' } });
    try {
      await signInAs(bench, 'technician');
      (bench.context.stdin as unknown as { end(): void }).end();
      expect([await runProgram(args, bench.context), bench.stdout()]).toEqual([2, '']);
      expect(bench.stderr()).not.toBe('');
      expect(bench.stderr()).not.toMatch(COLOUR);
    } finally {
      bench.remove();
    }
  });
});

describe.each(rows)('refettle %s', (name, row) => {
  const code = row.code ?? 0;

  test('When its output is a pipe, then the answer is on standard output without colour, and nobody is asked', async () => {
    const outcome = await inForm(name, 'pipe', row);
    expect(outcome.code, outcome.stderr).toBe(code);
    expect(outcome.stdout).toMatch(row.says);
    expect(outcome.stdout + outcome.stderr).not.toMatch(COLOUR);
    expect(outcome.stdout.endsWith('\n')).toBe(true);
  });

  const schema = 'none' in row.json ? undefined : row.json;
  if (schema)
    test('When JSON is asked for, then standard output is one JSON value of its form, and nothing else', async () => {
      const outcome = await inForm(name, 'JSON', row);
      expect(outcome.code, outcome.stderr).toBe(code);
      expect(outcome.stdout, 'one line').toMatch(/^[^\n]+\n$/);
      expect(schema.safeParse(JSON.parse(outcome.stdout)).error?.issues ?? []).toEqual([]);
      expect(outcome.stderr).not.toMatch(COLOUR);
    });

  test('When it stands at a terminal, then the answer is dressed, and with NO_COLOR it loses nothing but the colour', async () => {
    const dressed = await inForm(name, 'terminal', row);
    expect(dressed.code, dressed.stderr).toBe(code);
    expect(dressed.stdout.replaceAll(new RegExp(COLOUR, 'g'), '')).toMatch(row.says);
    expect(COLOUR.test(dressed.stdout)).toBe(row.colour ?? true);
    const plain = await inForm(name, 'terminal without colour', row);
    expect(plain.code, plain.stderr).toBe(code);
    expect(plain.stdout).toMatch(row.says);
    expect(plain.stdout).not.toMatch(COLOUR);
  });
});
