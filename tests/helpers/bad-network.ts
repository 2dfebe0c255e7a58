// A cable between bench and server that does to each request what real ones do, as it is told.
import { connect, createServer, type AddressInfo, type Server, type Socket } from 'node:net';

export const CABLE_FAULTS = [
  'cut before the request',
  'cut in the request',
  'cut before the answer',
  'cut in the answer',
  'half-closed by the bench',
  'half-closed in the answer',
  'slow',
] as const;
export type CableFault = (typeof CABLE_FAULTS)[number];

export interface BadNetwork {
  address: string;
  close(): Promise<void>;
}

const PIECE_BYTES = 4096;
const REQUEST = /^(?:GET|POST|DELETE) /;

/** `next` is asked once for each request; undefined lets it pass. */
export async function startBadNetwork(serverPort: number, next: () => CableFault | undefined): Promise<BadNetwork> {
  const sockets = new Set<Socket>();
  const keep = (socket: Socket): Socket => {
    sockets.add(socket);
    return socket.on('close', () => sockets.delete(socket)).on('error', () => socket.destroy());
  };
  /** In pieces, one after the other, with a moment between them. */
  const trickle = (bytes: Buffer, to: Socket, from: Socket): void => {
    from.pause();
    let sent = 0;
    const step = (): void => {
      to.write(bytes.subarray(sent, sent + PIECE_BYTES));
      sent += PIECE_BYTES;
      if (sent < bytes.length) setTimeout(step, 1);
      else from.resume();
    };
    step();
  };
  const join = (client: Socket): void => {
    const server = keep(connect({ port: serverPort, host: '127.0.0.1', allowHalfOpen: true }));
    let fault: CableFault | undefined;
    const cut = (): void => {
      client.destroy();
      server.destroy();
    };
    client.on('data', (bytes: Buffer) => {
      const begins = REQUEST.test(bytes.subarray(0, 8).toString('latin1'));
      if (begins) fault = next();
      if (fault === 'slow') trickle(bytes, server, client);
      else if (fault === 'cut before the request') cut();
      else if (fault === 'cut in the request') server.write(bytes.subarray(0, Math.ceil(bytes.length / 2)), cut);
      else server.write(bytes);
    });
    server.on('data', (bytes: Buffer) => {
      const half = bytes.subarray(0, Math.ceil(bytes.length / 2));
      if (fault === 'half-closed by the bench') server.end();
      if (fault === 'slow') trickle(bytes, client, server);
      else if (fault === 'cut before the answer') cut();
      else if (fault === 'cut in the answer') client.write(half, cut);
      else if (fault === 'half-closed in the answer') client.end(half);
      else client.write(bytes);
    });
    client.on('end', () => server.end()).on('close', () => server.destroy());
    server.on('end', () => client.end()).on('close', () => client.destroy());
  };
  const listener: Server = createServer({ allowHalfOpen: true }, (client) => join(keep(client)));
  await new Promise<void>((listening) => listener.listen(0, '127.0.0.1', listening));
  return {
    address: `http://127.0.0.1:${String((listener.address() as AddressInfo).port)}`,
    async close() {
      for (const socket of sockets) socket.destroy();
      await new Promise((closed) => listener.close(closed));
    },
  };
}
