const LOOPBACK = /^(localhost|.*\.localhost|127(\.\d{1,3}){3}|\[::1\])$/i;

/** Whether an address opens only on the machine it is on. */
export const isLoopbackAddress = (address: string): boolean => LOOPBACK.test(/^https?:\/\/(\[[^\]]*\]|[^/:?#]*)/i.exec(address)?.[1] ?? '');

/**
 * The address of a unit's page as a label carries it: where whoever prints reaches the server, for a phone on the same network reaches it
 * there too. Not where the public tags point to: that may show the tags alone.
 *
 * @example unitAddress('http://bench.example:4780', '0412') // 'http://bench.example:4780/units/0412'
 */
export const unitAddress = (server: string, number: string): string => `${server.replace(/\/+$/, '')}/units/${number}`;
