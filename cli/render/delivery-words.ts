import type { Delivery } from '../journal/deliver.js';

/** What became of something that was recorded, in words: on this bench, at the server, and who must act. */
export function deliveryWords(delivery: Delivery): string {
  const { what } = delivery.entry;
  if (delivery.state === 'sent') return `Sent: ${what}.`;
  const kept = `The ${what} is written down on this bench.`;
  if (delivery.state === 'waits') return `${kept} It waits: ${delivery.why}\nWhen that is done: refettle sync`;
  return `${kept} The server refuses it:\n${delivery.why}\nrefettle sync tries again; refettle sync --status shows it.`;
}
