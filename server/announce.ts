import { join } from 'node:path';
import type { Config } from './config.js';
import type { DemoAccount } from './seed/seed-demo-shop.js';

/** The last words of a start: where it is, and how to get in. */
export function announcement(config: Config, address: string, accounts: DemoAccount[], firstAdminLink: string | undefined): string {
  return `\n${[`Refettle is ready: ${address}`, ...waysIn(config, accounts, firstAdminLink), 'Ctrl-C stops it.'].join('\n\n')}\n`;
}

function waysIn(config: Config, accounts: DemoAccount[], firstAdminLink: string | undefined): string[] {
  if (firstAdminLink !== undefined) return [`The shop is empty. This link makes the first admin, once:\n  ${firstAdminLink}`];
  if (accounts.length === 0) return [];
  const widths = { role: longest(accounts.map(({ role }) => role)), email: longest(accounts.map(({ email }) => email)) };
  const rows = accounts.map(({ role, email, password }) => `  ${role.padEnd(widths.role)}  ${email.padEnd(widths.email)}  ${password}`);
  return [[`Accounts of the demo shop (also in ${join(config.dataDir, 'demo-accounts.json')}):`, ...rows].join('\n')];
}

function longest(texts: string[]): number {
  return Math.max(...texts.map((text) => text.length));
}
