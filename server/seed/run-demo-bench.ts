import { randomUUID } from 'node:crypto';
import { existsSync, mkdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { execa } from 'execa';
import { z } from 'zod';
import { packageRoot } from '../package-root.js';
import type { DemoAccount } from './seed-demo-shop.js';

export interface DemoBench {
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

const signIn = ({ email, password }: DemoAccount): Command => ({ args: ['sign-in', email, '--password-stdin'], input: `${password}\n` });
const takeIn: Command = {
  args: [
    'unit',
    'new',
    '--maker',
    'Demo',
    '--model',
    'Heron H6',
    '--serial',
    'DEMO-0001',
    '--family',
    'heron-h6',
    '--complaint',
    'does not fill',
    '--json',
  ],
};
const benchWork = (number: string): Command[] => [
  { args: ['run', 'heron-find', '--unit', number, '--rig', rig], endsWith: [0, 1] },
  { args: ['run', 'heron-prove', '--unit', number, '--rig', rig] },
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
  const { number } = z.object({ number: z.string() }).parse(JSON.parse(await refettle(bench, home, takeIn)));
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
  write(`\n$ refettle ${args.join(' ')}\n`);
  const result = await execa(process.execPath, [join(packageRoot, 'dist/cli/main.js'), ...args], {
    env: { REFETTLE_HOME: home, REFETTLE_SERVER: address },
    ...(input === undefined ? { stdin: 'ignore' as const } : { input }),
    stdout: args.includes('--json') ? 'pipe' : 'inherit',
    stderr: 'inherit',
    reject: false,
    cancelSignal: signal,
  });
  if (result.exitCode === undefined || !endsWith.includes(result.exitCode)) {
    throw new Error(`refettle ${args.join(' ')} ended with ${String(result.exitCode ?? result.signal)}.`);
  }
  return result.stdout ?? '';
}

async function signOff({ address, write }: DemoBench, lead: DemoAccount, number: string): Promise<void> {
  const post = async (path: string, body: unknown, token?: string): Promise<unknown> => {
    const response = await fetch(`${address}${path}`, {
      method: 'POST',
      headers: {
        'content-type': 'application/json',
        'idempotency-key': randomUUID(),
        ...(token ? { authorization: `Bearer ${token}` } : {}),
      },
      body: JSON.stringify(body),
    });
    if (!response.ok) throw new Error(`${path} answered ${response.status.toString()}: ${await response.text()}`);
    return response.json();
  };
  const { token } = z.object({ token: z.string() }).parse(await post('/api/sessions', { email: lead.email, password: lead.password }));
  await post(`/api/units/${number}/sign-off`, {}, token);
  write(`\nThe demo lead signed unit ${number} off.\n`);
}
