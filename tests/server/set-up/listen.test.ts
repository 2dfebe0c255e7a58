import { once } from 'node:events';
import type { AddressInfo } from 'node:net';
import { expect, test } from 'vitest';
import { addressOf, closeServer, listen, makeSureThatPortIsFree } from '../../../server/listen.js';

const answerOk = (_request: unknown, response: { end(text: string): void }): void => {
  response.end('ok');
};

test('When a server listens, then its address is one that a browser can open', async () => {
  const server = await listen(answerOk, '127.0.0.1', 0);

  expect(await (await fetch(addressOf(server))).text()).toBe('ok');
  await closeServer(server);
});

test('When it listens on every address, then the address shown is that of this machine', async () => {
  const server = await listen(answerOk, '0.0.0.0', 0);

  expect(addressOf(server)).toBe(`http://127.0.0.1:${(server.address() as AddressInfo).port.toString()}`);
  await closeServer(server);
});

test('When the port is taken, then the error names it and the variable to change', async () => {
  const server = await listen(answerOk, '127.0.0.1', 0);
  const { port } = server.address() as AddressInfo;

  await expect(makeSureThatPortIsFree('127.0.0.1', port)).rejects.toMatchObject({
    message: expect.stringContaining(`port ${port.toString()}`) as string,
    remedy: expect.stringContaining('PORT=') as string,
  });
  await closeServer(server);
  await makeSureThatPortIsFree('127.0.0.1', port);
});

test('When the machine does not have the address, then the error names HOST', async () => {
  // 192.0.2.0/24 is kept for documentation (RFC 5737): no machine has it.
  await expect(listen(answerOk, '192.0.2.1', 0)).rejects.toMatchObject({ remedy: expect.stringContaining('HOST') as string });
});

test('When a page keeps its connection open, then closing does not wait for it for ever', async () => {
  const server = await listen((_request, response) => response.writeHead(200).write('one line, and more to come\n'), '127.0.0.1', 0);
  const open = await fetch(addressOf(server));

  const closed = once(server, 'close');
  await closeServer(server);
  await closed;

  await expect(open.text()).rejects.toThrow();
});
