import { existsSync, mkdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { execa } from 'execa';
import { signedInSchema } from '../../shared/api/sessions.js';
import { unitPageSchema, unitSchema } from '../../shared/api/units.js';
import { unitNumberText } from '../../shared/unit-number.js';
import { packageRoot } from '../package-root.js';
import type { DemoAccount } from './seed-demo-shop.js';

interface DemoBench {
  /** Of the running server. */
  address: string;
  dataDir: string;
  accounts: DemoAccount[];
  write: (text: string) => void;
  /** Ends the command that is under way. */
  signal: AbortSignal;
}

interface Command {
  args: string[];
  /** What the command reads from standard input. */
  input?: string;
  /** 0, unless told: a run that finds the fault ends with 1, and that is what it is for. */
  endsWith?: number[];
}

const rig = 'sim:heron-mend';
const script = (name: string): string => `server/seed/shop/${name}.yaml`;

const signIn = ({ email, password }: DemoAccount): Command => ({
  args: ['sign-in', '--email', email, '--password-stdin'],
  input: `${password}\n`,
});
const takeIn: Command = {
  args: [
    ...['unit', 'new', '--json', '--appliance', 'washing machine', '--maker', 'Brindle', '--model', 'BW 620', '--class', 'I'],
    ...['--volts', '230', '--hertz', '50', '--watts', '2050', '--mass', '68'],
    ...[
      '--serial',
      '6204 0311 0893',
      '--family',
      'heron-h6',
      '--complaint',
      'Does not pump out, lamps blink',
      '--source',
      'house clearance',
    ],
    // A first run that was stopped half-way has left the same machine on the books.
    ...['--same-serial', 'other'],
  ],
};
const benchWork = (number: string): Command[] => [
  { args: ['run', script('h6-find'), number, '--rig', rig, '--unattended'], endsWith: [0, 1] },
  { args: ['run', script('h6-mend'), number, '--rig', rig, '--unattended'], endsWith: [0, 1] },
  { args: ['run', script('h6-prove'), number, '--rig', rig, '--unattended'] },
];
const printTag = (number: string): Command => ({ args: ['tag', number] });

/**
 * At the first start of a demo shop: one machine's way from the gate to the tag, through the real terminal program and on simulated
 * instruments. The technician works, the lead signs. Done once a data folder.
 */
export async function runDemoBench(bench: DemoBench): Promise<void> {
  const home = join(bench.dataDir, 'demo-bench');
  const done = join(home, 'done');
  if (existsSync(done)) return;
  mkdirSync(home, { recursive: true, mode: 0o700 });
  const technician = accountOf(bench, 'technician');
  const lead = accountOf(bench, 'lead');

  bench.write('\nA first bench run, on simulated instruments:\n');
  await refettle(bench, home, signIn(technician));
  const unit = unitSchema.parse(JSON.parse(await refettle(bench, home, takeIn)));
  const number = unitNumberText(unit.number);
  for (const command of benchWork(number)) await refettle(bench, home, command);
  await signOff(bench, lead, number);
  await refettle(bench, home, printTag(number));
  writeFileSync(done, `${number}\n`);
}

function accountOf({ accounts }: DemoBench, role: string): DemoAccount {
  const account = accounts.find((candidate) => candidate.role === role);
  if (!account) throw new Error(`The demo shop has no ${role}.`);
  return account;
}

/** Its messages, and its answer unless that is JSON, go to the terminal as they come. */
async function refettle({ address, write, signal }: DemoBench, home: string, { args, input, endsWith = [0] }: Command): Promise<string> {
  const line = `refettle ${args.map((arg) => (arg.includes(' ') ? `'${arg}'` : arg)).join(' ')}`;
  write(`\n$ ${line}\n`);
  const result = await execa(process.execPath, [join(packageRoot, 'dist/cli/main.js'), ...args], {
    cwd: packageRoot,
    env: { REFETTLE_HOME: home, REFETTLE_SERVER: address },
    ...(input === undefined ? { stdin: 'ignore' as const } : { input }),
    stdout: args.includes('--json') ? 'pipe' : 'inherit',
    stderr: 'inherit',
    reject: false,
    cancelSignal: signal,
  });
  if (result.exitCode === undefined || !endsWith.includes(result.exitCode)) {
    throw new Error(`${line} ended with ${String(result.exitCode ?? result.signal)}.`);
  }
  return result.stdout ?? '';
}

/** As the lead would in the browser: looks at the rules, then signs what was seen. */
async function signOff({ address, write, signal }: DemoBench, lead: DemoAccount, number: string): Promise<void> {
  const call = async (method: 'GET' | 'POST', path: string, token?: string, body?: unknown): Promise<unknown> => {
    const response = await fetch(`${address}${path}`, {
      method,
      signal,
      headers: { 'content-type': 'application/json', ...(token ? { authorization: `Bearer ${token}` } : {}) },
      ...(body === undefined ? {} : { body: JSON.stringify(body) }),
    });
    if (!response.ok) throw new Error(`${path} answered ${response.status.toString()}: ${await response.text()}`);
    return response.json();
  };
  const { email, password } = lead;
  const { token } = signedInSchema.parse(await call('POST', '/api/sessions', undefined, { email, password }));
  const { readiness } = unitPageSchema.parse(await call('GET', `/api/units/${number}`, token));
  await call('POST', `/api/units/${number}/sign-off`, token, { seen: readiness.rules.map(({ id, state }) => ({ id, state })) });
  write(`\nThe demo lead signed unit ${number} off.\n`);
}
