import { isIP } from 'node:net';

/** Whether an address is this machine's own, so that it opens nowhere else. */
export function isLoopback(address: string): boolean {
  const host = new URL(address).hostname.replace(/^\[|\]$/g, '').toLowerCase();
  if (host === 'localhost' || host.endsWith('.localhost') || host === '0.0.0.0' || host === '::' || host === '::1') return true;
  return isIP(host) === 4 && host.startsWith('127.');
}
