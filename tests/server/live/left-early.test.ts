// A page that leaves before its stream has begun must leave nothing behind that is fed for ever.
import { once } from 'node:events';
import { createServer, get, type ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { Response } from 'express';
import { pino } from 'pino';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { LiveHub, type LiveListener } from '../../../server/features/live/live-hub.js';
import { openStream } from '../../../server/features/live/live-stream.js';
import { freshDatabase, type FreshDatabase } from '../../helpers/fresh-database.js';

/** A hub that can be asked who listens, and held up. */
class CountedHub extends LiveHub {
  readonly listening = new Set<LiveListener>();
  holdUp: Promise<unknown> = Promise.resolve();

  override join(listener: LiveListener) {
    return this.holdUp
      .then(() => super.join(listener))
      .then((answer) => {
        this.listening.add(listener);
        return answer;
      });
  }

  override leave(listener: LiveListener): void {
    super.leave(listener);
    this.listening.delete(listener);
  }
}

let database: FreshDatabase;
let hub: CountedHub;
beforeAll(async () => {
  database = await freshDatabase();
  hub = new CountedHub({ db: database.db, databaseUrl: database.url, log: pino({ level: 'silent' }) });
});
afterAll(async () => {
  await hub.close();
  await database.drop();
});

/** The answer to somebody who is still there; `leave` waits until the server knows that they are not. */
async function somebody(): Promise<{ response: Response; leave: () => Promise<void> }> {
  const http = createServer();
  await new Promise<void>((listening) => http.listen(0, '127.0.0.1', listening));
  const request = get({ port: (http.address() as AddressInfo).port, host: '127.0.0.1' }).on('error', () => undefined);
  const [, response] = (await once(http, 'request')) as [unknown, ServerResponse];
  const leave = async (): Promise<void> => {
    const closed = once(response, 'close');
    request.destroy();
    await closed;
    http.close();
  };
  return { response: response as Response, leave };
}
const opened = (response: Response) =>
  openStream({ hub, db: database.db, response, unit: undefined, after: undefined, stillAllowed: () => Promise.resolve(true) });

test('When a page leaves while its sign-in is looked at, then nobody listens for it', async () => {
  const { response, leave } = await somebody();
  await leave();
  await opened(response);
  expect(hub.listening.size).toBe(0);
});

test('When a page leaves while the hub connects, then nobody listens for it', async () => {
  const { response, leave } = await somebody();
  hub.holdUp = leave();
  await opened(response);
  expect(hub.listening.size).toBe(0);
});
