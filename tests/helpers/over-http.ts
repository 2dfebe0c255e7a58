// A server of a test behind a real port of this machine; its plug can be pulled and put back.
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { Express } from 'express';

export interface OverHttp {
  address: string;
  port: number;
  /** Every connection breaks and none is taken. Also the end, in `afterAll`. */
  unplug(): Promise<void>;
  /** Again at the same port. */
  plugIn(): Promise<void>;
}

export async function overHttp(app: Express): Promise<OverHttp> {
  let http: Server;
  const listen = async (port: number): Promise<number> => {
    http = createServer(app);
    await new Promise<void>((listening) => http.listen(port, '127.0.0.1', listening));
    return (http.address() as AddressInfo).port;
  };
  const port = await listen(0);
  return {
    address: `http://127.0.0.1:${String(port)}`,
    port,
    async unplug() {
      http.closeAllConnections();
      await new Promise((closed) => http.close(closed));
    },
    async plugIn() {
      await listen(port);
    },
  };
}
