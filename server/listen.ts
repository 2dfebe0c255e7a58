import type { RequestListener, Server } from 'node:http';
import { createServer } from 'node:http';
import { createServer as createTlsServer, Server as TlsServer } from 'node:https';
import type { AddressInfo } from 'node:net';
import { hostname, networkInterfaces } from 'node:os';
import { SetUpError } from './set-up-error.js';
import { keepTlsFresh, readTlsPair, type Tls } from './tls.js';

const everyAddress = new Set(['0.0.0.0', '::']);
/** Live pages hold their connection open for as long as they are looked at. */
const finishesWithinMs = 2_000;

/** What to set for a listener that can't have its address. */
interface Settings {
  host: string;
  port: string;
}
const USUAL: Settings = { host: 'HOST', port: 'PORT' };

/** A server that listens, by https where there is a certificate, renewed ones too. Refuses with a remedy where the address can't be had. */
export async function listen(
  handler: RequestListener,
  host: string,
  port: number,
  { tls, settings = USUAL }: { tls?: Tls | undefined; settings?: Settings } = {},
): Promise<Server | TlsServer> {
  const server = tls ? createTlsServer(readTlsPair(tls.files), handler) : createServer(handler);
  try {
    await new Promise<void>((resolve, reject) => {
      server.once('error', reject).listen(port, host, resolve);
    });
    if (tls && server instanceof TlsServer) server.once('close', keepTlsFresh(server, tls.files, tls.log));
    return server;
  } catch (cause) {
    const { code } = cause as NodeJS.ErrnoException;
    const place = `${host}, port ${port.toString()}`;
    if (code === 'EADDRINUSE') {
      throw new SetUpError(
        `Another program already listens on ${place}.`,
        `Choose another port: ${settings.port}=${(port + 1).toString()} npm start.`,
        { cause },
      );
    }
    if (code === 'EACCES') {
      throw new SetUpError(`This user may not listen on ${place}.`, `Choose a port above 1023: ${settings.port}=4780 npm start.`, {
        cause,
      });
    }
    if (code === 'EADDRNOTAVAIL' || code === 'ENOTFOUND' || code === 'EAI_AGAIN') {
      throw new SetUpError(
        `This machine has no address ${host}.`,
        `Set ${settings.host} to one that it has: 127.0.0.1 for itself alone, 0.0.0.0 for all.`,
        { cause },
      );
    }
    throw cause;
  }
}

/** Before the long work of a start: better to hear at once that the port is taken. */
export async function makeSureThatPortIsFree(host: string, port: number, settings = USUAL): Promise<void> {
  await closeServer(await listen((_request, response) => response.writeHead(503).end(), host, port, { settings }));
}

/** What to type into a browser on this machine. */
export function addressOf(server: Server): string {
  const { address, port } = server.address() as AddressInfo;
  return urlOf(server, everyAddress.has(address) ? '127.0.0.1' : address, port);
}

/** What to type into a browser on another machine of the network: by name and by each address. None where only this machine is served. */
export function networkAddressesOf(server: Server): string[] {
  const { address, port } = server.address() as AddressInfo;
  if (!everyAddress.has(address)) return [];
  const addresses = Object.values(networkInterfaces())
    .flatMap((those) => those ?? [])
    .filter(({ internal, family }) => !internal && family === 'IPv4')
    .map((one) => one.address);
  return [hostname(), ...addresses].map((host) => urlOf(server, host, port));
}

const urlOf = (server: Server, host: string, port: number): string =>
  `${server instanceof TlsServer ? 'https' : 'http'}://${host.includes(':') ? `[${host}]` : host}:${port.toString()}`;

/** Lets requests finish for a moment, then cuts them off. */
export async function closeServer(server: Server): Promise<void> {
  const closed = new Promise((resolve) => server.close(resolve));
  const cutOff = setTimeout(() => {
    server.closeAllConnections();
  }, finishesWithinMs);
  await closed;
  clearTimeout(cutOff);
}
