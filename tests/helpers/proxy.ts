// What a reverse proxy before two servers is to a connection: it goes to the first that takes it; where a server dies, its connections break.
import { connect, createServer, type AddressInfo, type Server, type Socket } from 'node:net';

export interface Proxy {
  address: string;
  /** The servers' ports, the preferred one first. */
  targets: number[];
  close(): Promise<void>;
}

export async function startProxy(targets: number[]): Promise<Proxy> {
  const sockets = new Set<Socket>();
  const keep = (socket: Socket): Socket => {
    sockets.add(socket);
    return socket.on('close', () => sockets.delete(socket)).on('error', () => socket.destroy());
  };
  const proxy = { targets: [...targets] };
  const tryNext = (client: Socket, ports: readonly number[]): void => {
    const [port, ...others] = ports;
    if (port === undefined) {
      client.destroy();
      return;
    }
    const server = keep(connect(port, '127.0.0.1'));
    let connected = false;
    server.on('connect', () => {
      connected = true;
      client.pipe(server);
      server.pipe(client);
    });
    server.on('close', () => {
      if (connected) client.destroy();
      else tryNext(client, others);
    });
    client.on('close', () => server.destroy());
  };
  const listener: Server = createServer({ pauseOnConnect: true }, (client) => tryNext(keep(client), proxy.targets));
  await new Promise<void>((listening) => listener.listen(0, '127.0.0.1', listening));
  return {
    address: `http://127.0.0.1:${String((listener.address() as AddressInfo).port)}`,
    get targets() {
      return proxy.targets;
    },
    set targets(ports) {
      proxy.targets = ports;
    },
    async close() {
      for (const socket of sockets) socket.destroy();
      await new Promise((closed) => listener.close(closed));
    },
  };
}
