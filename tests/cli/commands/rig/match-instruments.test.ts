import { expect, test } from 'vitest';
import { matchInstruments } from '../../../../cli/commands/rig/match-instruments.js';
import type { RigMeter } from '../../../../cli/instruments/rig-file.js';

/** Serial number 0: "not available" (IEEE 488.2, 10.14). */
const NAMELESS = 'Millrace,BM-4,0,1.0';
const meter = (id: string, port: string, identification?: string): RigMeter => ({
  id,
  kind: 'meter',
  port,
  ...(identification === undefined ? {} : { identification }),
  accuracy: {},
});
const answer = (port: string, identification = NAMELESS) => ({ port, state: 'answers', baudRate: 9600, identification }) as const;

/** What comes of it, in few words: `M-01@USB0 as written`. */
function matched(instruments: RigMeter[], answers: ReturnType<typeof answer>[]) {
  const { found, unclear, missing } = matchInstruments({ instruments }, answers);
  return {
    found: found.map(({ instrument: { id, port }, standing }) => `${id}@${port} ${standing}`),
    unclear: unclear.map(({ answer: { port }, candidates }) => `${port}: ${candidates.map(({ id }) => id).join(' or ')}`),
    missing: missing.map(({ id }) => id),
  };
}
const two = [meter('M-01', 'USB0', NAMELESS), meter('M-02', 'USB1', NAMELESS)];

test('When two of one model say no serial number and answer where they belong, then they stay there, whatever port is asked first', () => {
  const stays = { found: ['M-02@USB1 as written', 'M-01@USB0 as written'], unclear: [], missing: [] };
  expect(matched(two, [answer('USB1'), answer('USB0')])).toEqual(stays);
});

test('When one of the two is off, then the other is not taken for it', () => {
  expect(matched(two, [answer('USB1')])).toEqual({ found: ['M-02@USB1 as written'], unclear: [], missing: ['M-01'] });
});

test('When one of the two answers on a third port, or two on other ports fit one, then which it is stays open', () => {
  expect(matched(two, [answer('USB2')])).toEqual({ found: [], unclear: ['USB2: M-01 or M-02'], missing: [] });
  expect(matched([meter('M-01', 'USB0', NAMELESS)], [answer('USB1'), answer('USB2')])).toEqual({
    found: [],
    unclear: ['USB1: M-01', 'USB2: M-01'],
    missing: [],
  });
  // By its port it may be M-02, of which nobody wrote down what it answers; by its model M-01.
  expect(matched([meter('M-01', 'USB0', NAMELESS), meter('M-02', 'USB1')], [answer('USB1')])).toEqual({
    found: [],
    unclear: ['USB1: M-01 or M-02'],
    missing: [],
  });
});

test('When nothing else can be meant, then a model without a serial number is found on another port', () => {
  expect(matched([meter('M-01', 'USB0', NAMELESS)], [answer('USB3')])).toEqual({ found: ['M-01@USB3 moved'], unclear: [], missing: [] });
});

test('When serial numbers are said, then they count before any port', () => {
  const rig = [meter('M-01', 'USB0', 'Millrace,BM-4,7,1.0'), meter('M-02', 'USB1', NAMELESS)];
  expect(matched(rig, [answer('USB0'), answer('USB1', 'Millrace,BM-4,7,1.2')])).toEqual({
    found: ['M-02@USB0 moved', 'M-01@USB1 moved'],
    unclear: [],
    missing: [],
  });
});
