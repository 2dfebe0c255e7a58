// Two server processes behind a proxy and one database; a browser looks at the board through the proxy while either is killed.
import { v4 as anyId } from 'uuid';
import { afterAll, beforeAll, expect, test } from 'vitest';
import type { LiveMessage } from '../../shared/api/live.js';
import { openShop, type BrowserShop } from '../helpers/browser.js';
import { addHeron, newLive, takeIn } from '../helpers/factories.js';
import { startProxy, type Proxy } from '../helpers/proxy.js';
import { startServerProcess, type ServerProcess } from '../helpers/server-process.js';

let shop: BrowserShop;
let proxy: Proxy;
let unit: number;
const servers: ServerProcess[] = [];

beforeAll(async () => {
  shop = await openShop();
  await addHeron(shop.server);
  unit = (await takeIn(shop.server)).number;
  const databaseUrl = shop.server.deps.config.databaseUrl ?? '';
  servers.push(...(await Promise.all([1, 2].map(() => startServerProcess(databaseUrl, shop.baseUrl)))));
  proxy = await startProxy(servers.map(({ port }) => port));
});
afterAll(async () => {
  await proxy.close();
  await Promise.all(servers.map((server) => server.remove()));
  await shop.close();
});

test('When either of two servers is killed or stopped, then the browser’s EventSource goes on with the other: nothing is missing, nothing comes twice', async () => {
  const { technician, lead } = shop.server.people;
  const { page } = await shop.open(lead, { fresh: true });
  // The page of the shop in this process, for the cookie and the same origin; the stream is that of the proxy.
  await page
    .context()
    .addCookies([{ name: 'refettle_session', value: lead.token, url: proxy.address, httpOnly: true, sameSite: 'Strict' }]);
  await page.goto(`${proxy.address}/sign-in`).catch(() => undefined);
  const ids = { sitting: anyId(), work: anyId() };
  let part = 0;
  /** To whichever server lives: as the bench's terminal does it, the same part again until it is taken. */
  const tell = async (...messages: LiveMessage[]): Promise<void> => {
    const body = JSON.stringify({ ...ids, part: part++, unit, messages });
    for (;;) {
      const taken = await fetch(`${proxy.address}/api/live`, {
        method: 'POST',
        headers: { 'content-type': 'application/json', authorization: `Bearer ${technician.token}` },
        body,
        signal: AbortSignal.timeout(30_000),
      }).then(
        ({ status }) => status === 200,
        (error: Error) => {
          if (error.name === 'TimeoutError') throw error;
          return false;
        },
      );
      if (taken) return;
      await new Promise((resolve) => setTimeout(resolve, 30));
    }
  };
  await tell(newLive(unit).messages[0] as LiveMessage);
  await page.evaluate(() => {
    const heard = { marks: [] as number[], starts: 0, opened: 0, up: false };
    Object.assign(window, { heard });
    // The browser's own resumption: nothing of ours between.
    const stream = new EventSource('/api/live');
    stream.onopen = () => (heard.opened += 1);
    stream.onmessage = ({ data }: MessageEvent<string>) => {
      const event = JSON.parse(data) as { kind: string; messages?: { kind: string; atMs?: number }[] };
      if (event.kind === 'start') heard.starts += 1;
      if (event.kind === 'now') heard.up = true;
      for (const message of event.messages ?? []) if (message.kind === 'mark') heard.marks.push(message.atMs ?? -1);
    };
  });
  const heard = () =>
    page.evaluate(() => (window as unknown as { heard: { marks: number[]; starts: number; opened: number; up: boolean } }).heard);
  await expect.poll(async () => (await heard()).up, { timeout: 20_000 }).toBe(true);

  let telling = true;
  let last = 0;
  const bench = (async () => {
    while (telling) {
      await tell({ kind: 'mark', atMs: (last += 1) });
      await new Promise((resolve) => setTimeout(resolve, 20));
    }
  })();
  const goesOn = async (): Promise<void> => {
    const from = last;
    await expect.poll(async () => (await heard()).marks.at(-1) ?? 0, { timeout: 30_000 }).toBeGreaterThan(from + 10);
  };
  const [first, second] = servers as [ServerProcess, ServerProcess];
  await goesOn();
  await first.kill();
  await goesOn();
  const again = await startServerProcess(shop.server.deps.config.databaseUrl ?? '', shop.baseUrl);
  servers.push(again);
  proxy.targets = [again.port, second.port];
  await goesOn();
  // This one is asked to stop: an open page must not hold it up.
  expect(await second.stop()).toBe(0);
  await goesOn();
  telling = false;
  await bench;
  await expect.poll(async () => (await heard()).marks.at(-1), { timeout: 30_000 }).toBe(last);
  const { marks, starts, opened } = await heard();
  expect(marks).toEqual(Array.from({ length: last }, (_, index) => index + 1));
  expect(starts).toBe(1);
  expect(opened).toBeGreaterThanOrEqual(3);
});
