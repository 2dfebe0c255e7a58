import { join } from 'node:path';
import type { Config } from './config.js';
import type { DemoBenchAccess } from './seed/seed-demo-bench.js';
import type { DemoAccount } from './seed/seed-demo-shop.js';

/** The last words of a start: where it is, and how to get in. */
export function announcement(
  config: Config,
  { address, network, publicAddress }: Places,
  accounts: DemoAccount[],
  firstAdminLink: string | undefined,
  demoBench?: DemoBenchAccess,
): string {
  const where = [
    `Refettle is ready: ${address}`,
    ...(network.length > 0 ? [`From other machines of the network: ${network.join(' or ')}`] : []),
    ...(publicAddress === undefined ? [] : [`Buyers’ pages alone: ${publicAddress}/t`]),
  ].join('\n');
  return `\n${[where, ...waysIn(config, network, accounts, firstAdminLink), ...waysToTheBench(config, demoBench), 'Ctrl-C stops it.'].join('\n\n')}\n`;
}

/** Where it listens: for this machine, for others, and for the street. */
interface Places {
  address: string;
  network: string[];
  publicAddress: string | undefined;
}

function waysIn(config: Config, network: string[], accounts: DemoAccount[], firstAdminLink: string | undefined): string[] {
  if (firstAdminLink !== undefined) {
    const { pathname, hash } = new URL(firstAdminLink);
    const elsewhere = network.slice(0, 1).map((base) => `\nFrom another machine:\n  ${base}${pathname}${hash}`);
    return [`The shop is empty. This link makes the first admin, once:\n  ${firstAdminLink}${elsewhere.join('')}`];
  }
  if (accounts.length === 0) return [];
  const widths = { role: longest(accounts.map(({ role }) => role)), email: longest(accounts.map(({ email }) => email)) };
  const rows = accounts.map(({ role, email, password }) => `  ${role.padEnd(widths.role)}  ${email.padEnd(widths.email)}  ${password}`);
  return [[`Accounts of the demo shop (also in ${join(config.dataDir, 'demo-accounts.json')}):`, ...rows].join('\n')];
}

/** The shared bench is for a computer of its own, or for another REFETTLE_HOME. */
function waysToTheBench(config: Config, access: DemoBenchAccess | undefined): string[] {
  if (!access) return [];
  const pins = access.pins.map(({ name, pin }) => `${name} ${pin}`).join(', ');
  return [
    [
      `Shared bench ${access.bench} (also in ${join(config.dataDir, 'demo-bench.json')}), to be joined with refettle bench join:`,
      `  token  ${access.token}`,
      ...(pins === '' ? [] : [`  PINs   ${pins}`]),
    ].join('\n'),
  ];
}

function longest(texts: string[]): number {
  return Math.max(...texts.map((text) => text.length));
}
