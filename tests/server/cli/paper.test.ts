// Tags and labels through the program against a real server: as a terminal, a pipe and JSON; with and without the network.
import { chmodSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { runProgram } from '../../../cli/program.js';
import { benchTerminal, signedIn } from '../../helpers/bench-terminal.js';
import { addHeron, mendAndProve, rulesSeen, takeIn } from '../../helpers/factories.js';
import { pageSizes, picturesOf, readQr, wordsOnPaper } from '../../helpers/read-paper.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
let http: OverHttp;
let address: string;
let home: string;
let ready: number;
let bare: number;

beforeAll(async () => {
  server = await startTestServer({ shop: { demo: true } });
  await addHeron(server);
  ready = (await takeIn(server)).number;
  await mendAndProve(server, ready);
  await server.ok('signOff', { as: server.people.lead, params: { number: ready }, body: await rulesSeen(server, ready) });
  bare = (await takeIn(server)).number;
  http = await overHttp(server.app);
  address = http.address;
  home = mkdtempSync(join(tmpdir(), 'refettle-paper-cli-'));
  writeFileSync(join(home, 'lp'), "#!/bin/sh\necho 'request id is desk-7 (1 file(s))'\n");
  chmodSync(join(home, 'lp'), 0o755);
});
afterAll(async () => {
  await http.unplug();
  await server.close();
  rmSync(home, { recursive: true, force: true });
});

async function refettle(args: string[], { terminal = false } = {}): Promise<{ code: number; stdout: string; stderr: string }> {
  const bench = benchTerminal({ home, terminal, env: { REFETTLE_SERVER: address, PATH: `${home}:/usr/bin:/bin` } });
  signedIn(bench, server.people.technician);
  return { code: await runProgram(args, bench.context), stdout: bench.stdout(), stderr: bench.stderr() };
}
const text = (number: number): string => String(number).padStart(4, '0');

test('When tags are printed, then those that stand go on paper, the others are named, and no page is blank', async () => {
  const pdf = join(home, 'tags.pdf');
  const both = await refettle(['tag', text(ready), text(bare), text(ready), '--format', 'a4', '--pdf', pdf, '--json']);
  expect(both.code).toBe(1);
  expect(both.stderr).toBe(
    `No. ${text(bare)} has no standing tag: left out.\nThe tag is in ${pdf}: A4, four tags a sheet, print it at 100 %.\n`,
  );
  expect(JSON.parse(both.stdout)).toMatchObject({
    units: [
      { unit: ready, ready: true },
      { unit: bare, ready: false },
    ],
    pdf,
  });
  expect(pageSizes(readFileSync(pdf))).toHaveLength(1);
  const tag = await server.ok('getUnitTag', { params: { number: ready }, as: server.people.lead });
  expect(readQr(picturesOf(readFileSync(pdf))[0]!)).toBe(tag.url);

  const printed = await refettle(['tag', text(ready), '--format', '4x6', '--print'], { terminal: true });
  expect(printed.code).toBe(0);
  expect(printed.stderr).toBe('The tag is at the printer: job desk-7.\n');
  expect(printed.stdout).toMatch(/READY {3}SAMPLE[\s\S]*exit 0/);

  const none = await refettle(['tag', text(bare), '--print']);
  expect(none.code).toBe(1);
  expect(none.stderr).toContain('no PDF was written');
  expect(none.stdout).toContain('rules met');
});

test('When labels are printed, then as a terminal, a pipe and JSON they say what is on them', async () => {
  const pdf = join(home, 'label.pdf');
  const stock = await refettle(['label', text(bare), '--pdf', pdf]);
  expect(stock).toMatchObject({ code: 0 });
  expect(stock.stdout).toMatch(new RegExp(`^ {2}No\\. ${text(bare)}\\n {2}Brindle BW 714, washing machine\\n {2}serial `));
  expect(stock.stderr).toContain(`The stock label is in ${pdf}: 62 x 29 mm`);
  // The test's server is on this machine only.
  expect(stock.stderr).toContain('no phone can open');
  expect(readQr(picturesOf(readFileSync(pdf))[0]!)).toBe(`${address}/units/${text(bare)}`);

  const wish = ['label', text(ready), '--kind', 'price', '--price', '129.00', '--grade', 'B', '--size', '70x40', '--pdf', pdf];
  const price = await refettle([...wish, '--json']);
  expect(price.code).toBe(0);
  expect(JSON.parse(price.stdout)).toMatchObject({
    ...{ unit: ready, kind: 'price', size: { widthMm: 70, heightMm: 40 }, pdf },
    says: ['£129.00, grade B', 'Brindle BW 714, washing machine', `No. ${text(ready)}, readiness tag ${text(ready)}-1`, expect.any(String)],
  });
  expect(wordsOnPaper(readFileSync(pdf))).toContain('£129.00');
  const parts = await refettle(['label', text(bare), '--kind', 'price', '--price', '20', '--print'], { terminal: true });
  expect(parts.stdout).toContain('for parts only, no tag');
  expect(parts.stderr).toContain('The price label is at the printer: job desk-7.');
  expect((await refettle(['label', text(bare), '--kind', 'price', '--price', '12,50', '--print'])).code).toBe(2);
});

test('When the network is away, then labels of units this bench has seen are printed all the same, but no tag, and no label that names one', async () => {
  await refettle(['label', text(ready), '--code', 'bars', '--print']);
  const before = address;
  address = 'http://127.0.0.1:1';
  try {
    const bench = benchTerminal({ home, env: { REFETTLE_SERVER: address, PATH: `${home}:/usr/bin:/bin` } });
    signedIn(bench, server.people.technician);
    expect(await runProgram(['label', text(ready), '--code', 'bars', '--print'], bench.context)).toBe(0);
    expect(bench.stderr()).toMatch(/can't be reached: the label says what this bench knows[\s\S]*job desk-7/);
    expect((await refettle(['tag', text(ready), '--print'])).code).toBe(5);
    // Its tag may have been withdrawn meanwhile: a price label would name it.
    const price = await refettle(['label', text(ready), '--kind', 'price', '--price', '129', '--print']);
    expect(price).toMatchObject({ code: 5, stdout: '' });
    expect(price.stderr).toContain(`nobody can say whether tag ${text(ready)}-1 still stands`);
    expect((await refettle(['label', text(bare), '--kind', 'price', '--price', '20', '--print'])).stdout).toContain('no tag');
  } finally {
    address = before;
  }
});
