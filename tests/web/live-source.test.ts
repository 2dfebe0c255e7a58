import { afterEach, beforeEach, expect, test, vi } from 'vitest';
import { LIVE_BEAT, type LiveEvent, type LiveMessage, type LiveWorkEvent } from '../../shared/api/live.js';
import { LiveSource } from '../../web/features/live/live-source.js';
import { afterEvent, benchesOf, withoutOld, type LiveWorks } from '../../web/features/live/live-state.js';
import { newLive } from '../helpers/factories.js';

const WIL = { id: '00000000-0000-4000-8000-000000000001', name: 'Wil Tarrow', role: 'technician' } as const;
const began = newLive(412).messages[0] as Extract<LiveMessage, { kind: 'began' }>;
const at = began.at;
const ended: LiveMessage = { kind: 'ended', at, how: 'ended', verdict: 'pass' };
const captureBegan: LiveMessage = {
  kind: 'capture began',
  at,
  captureId: '00000000-0000-4000-8000-0000000000c1',
  byKeys: false,
  lamps: [{ id: 'fill', label: 'Fill', colour: 'amber' }],
};
const work = (id: number, messages: LiveMessage[], change: Partial<LiveWorkEvent> = {}): LiveWorkEvent => ({
  kind: 'work',
  at,
  work: `00000000-0000-4000-8000-${String(id).padStart(12, '0')}`,
  unit: 412,
  by: WIL,
  messages,
  ...change,
});
const after = (events: LiveEvent[], nowMs = 0): LiveWorks =>
  events.reduce<LiveWorks>((works, event) => afterEvent(works, event, nowMs), new Map());
const only = (works: LiveWorks) => [...works.values()][0];

test('When work ends, then its lanes are let go', () => {
  const works = after([work(1, [began, captureBegan, { kind: 'lamps', rows: [[0, 60]] }, ended])]);
  expect(only(works)).toMatchObject({ capture: undefined, ended: { verdict: 'pass' } });
});

test('When a capture goes on for an hour, then the last minute of lanes and marks is kept, and no more than so many of either', () => {
  const hour = Array.from({ length: 3600 }, (_, second): LiveMessage[] => [
    { kind: 'mark', atMs: second * 1000 },
    { kind: 'lamps', rows: Array.from({ length: 20 }, (_row, row) => [second * 1000 + row * 50, 60]) },
  ]).flat();
  const { capture } = only(after([work(1, [began, captureBegan, ...hour])])) ?? {};
  expect(capture?.rows[0]?.[0]).toBe(3_599_950 - 60_000);
  expect(capture?.marksMs.length).toBe(60);
  // A bench that tells nonsense: all at one moment.
  const flood = Array.from({ length: 5_000 }, (): LiveMessage[] => [
    { kind: 'mark', atMs: 1 },
    { kind: 'lamps', rows: [[1, 60]] },
  ]).flat();
  const flooded = only(after([work(1, [began, captureBegan, ...flood])]))?.capture;
  expect(flooded?.rows.length).toBeLessThanOrEqual(2_400);
  expect(flooded?.marksMs.length).toBeLessThanOrEqual(100);
});

test('When time goes by, then ended work is let go after ten minutes and a silent bench after fifteen', () => {
  const works = after([work(1, [began, ended]), work(2, [began])]);
  const minutes = 60_000;
  expect(withoutOld(works, 10 * minutes)).toBe(works);
  expect([...withoutOld(works, 10 * minutes + 1).values()].map(({ ended: end }) => end)).toEqual([undefined]);
  expect(withoutOld(works, 15 * minutes + 1).size).toBe(0);
});

test('When two people of one name work, or one at two rigs of one name, then none hides the other; what began later stands for what ended', () => {
  const namesake = { ...WIL, id: '00000000-0000-4000-8000-000000000002' };
  const idsOf = (events: LiveEvent[], nowMs = 0): number[] => benchesOf(after(events), nowMs).map(({ id }) => Number(id.slice(-3)));
  expect(idsOf([work(1, [began]), work(2, [began], { by: namesake })])).toEqual([1, 2]);
  expect(idsOf([work(1, [began]), work(2, [began])])).toEqual([1, 2]);
  // A bench that is called as a rig with its technician would be.
  expect(idsOf([work(1, [began, ended]), work(2, [began], { bench: 'bench 1, Wil Tarrow' })])).toEqual([1, 2]);
  expect(idsOf([work(1, [began, ended]), work(2, [began])])).toEqual([2]);
  // After a minute without a sign the first was broken off: one bench does one thing at a time.
  expect(idsOf([work(1, [began]), work(2, [began])], 60_001)).toEqual([2]);
});

/** An EventSource whose server is the test. */
class ToldSource extends EventTarget {
  static readonly CLOSED = 2;
  static opened: ToldSource[] = [];
  readyState = 1;
  constructor(readonly url: string) {
    super();
    ToldSource.opened.push(this);
  }
  close(): void {
    this.readyState = ToldSource.CLOSED;
  }
  tell(event: LiveEvent, lastEventId = ''): void {
    this.dispatchEvent(new MessageEvent('message', { data: JSON.stringify(event), lastEventId }));
  }
  beat(lastEventId: string): void {
    this.dispatchEvent(new MessageEvent(LIVE_BEAT, { data: '', lastEventId }));
  }
  fail(closed: boolean): void {
    this.readyState = closed ? ToldSource.CLOSED : 0;
    this.dispatchEvent(new Event('error'));
  }
}

const page = Object.assign(new EventTarget(), { visibilityState: 'visible' });
beforeEach(() => {
  vi.useFakeTimers();
  ToldSource.opened = [];
  page.visibilityState = 'visible';
  vi.stubGlobal('EventSource', ToldSource);
  vi.stubGlobal('document', page);
});
afterEach(() => {
  vi.useRealTimers();
  vi.unstubAllGlobals();
});

function listening() {
  const changed = vi.fn<(unit: number | undefined) => void>();
  const refused = vi.fn();
  const source = new LiveSource(412, { changed, refused });
  const shown: { works: number; up: boolean }[] = [];
  source.subscribe(() => shown.push({ works: source.view.works.size, up: source.view.up }));
  source.start();
  return { source, shown, changed, refused, stream: () => ToldSource.opened.at(-1) as ToldSource };
}

test('When a page opens, then what goes on is shown at once when all of it has been told, and each thing after that as it comes', () => {
  const { stream, shown, changed, source } = listening();
  stream().tell({ kind: 'start' });
  stream().tell(work(1, [began]));
  stream().tell(work(2, [began]));
  expect(shown).toEqual([]);
  stream().tell({ kind: 'now' }, '7');
  expect(shown).toEqual([{ works: 2, up: true }]);
  stream().tell(work(3, [began]), '8');
  stream().tell({ kind: 'unit changed', unit: 412 }, '9');
  expect(shown.at(-1)).toEqual({ works: 3, up: true });
  expect(changed.mock.calls).toEqual([[undefined], [412]]);
  source.stop();
});

test('When a page begins anew, then what stood there stands until the new is told whole', () => {
  const { stream, shown, source } = listening();
  stream().tell({ kind: 'start' });
  stream().tell(work(1, [began]));
  stream().tell({ kind: 'now' }, '7');
  stream().fail(false);
  stream().tell({ kind: 'start' });
  stream().tell(work(2, [began]));
  expect(shown.at(-1)).toEqual({ works: 1, up: false });
  stream().tell({ kind: 'now' }, '20');
  expect([...source.view.works.keys()]).toEqual([work(2, []).work]);
  source.stop();
});

test('When the connection is silent for two beats and a half, or the server refuses, then a new stream goes on at the same place', () => {
  const { stream, refused, source } = listening();
  stream().tell({ kind: 'now' }, '7');
  stream().beat('11');
  vi.advanceTimersByTime(37_500);
  expect(source.view.up).toBe(false);
  vi.advanceTimersByTime(500);
  expect(ToldSource.opened).toHaveLength(2);
  expect(new URL(stream().url, 'http://shop.example').searchParams.get('after')).toBe('11');
  stream().fail(true);
  expect(refused).toHaveBeenCalledTimes(1);
  // Somebody does not want to wait for the next try.
  source.retry();
  expect(ToldSource.opened).toHaveLength(3);
  source.stop();
});

test('When nobody sees the page for ten seconds, then it gives its connection back, and opens it again where it was', () => {
  const { stream, source } = listening();
  stream().tell({ kind: 'now' }, '7');
  page.visibilityState = 'hidden';
  page.dispatchEvent(new Event('visibilitychange'));
  vi.advanceTimersByTime(10_000);
  expect(stream().readyState).toBe(ToldSource.CLOSED);
  page.visibilityState = 'visible';
  page.dispatchEvent(new Event('visibilitychange'));
  expect(ToldSource.opened).toHaveLength(2);
  expect(stream().url).toContain('after=7');
  source.stop();
});

test('When a beat comes, then old work is let go', () => {
  const { stream, source } = listening();
  stream().tell({ kind: 'now' }, '7');
  stream().tell(work(1, [began, ended]), '8');
  for (let beat = 0; beat <= 40; beat += 1) {
    vi.advanceTimersByTime(15_000);
    stream().beat('8');
  }
  expect(source.view.works.size).toBe(0);
  source.stop();
});
