import { afterAll, expect, test } from 'vitest';
import { LineSplitter, LONGEST_LINE } from '../../../cli/instruments/line-splitter.js';
import { parseSampleLine, writeSampleLine, type ProbeSample } from '../../../cli/instruments/sample-line.js';
import { SampleTimeline } from '../../../cli/instruments/sample-timeline.js';
import { ScpiConversation } from '../../../cli/instruments/scpi-conversation.js';
import type { Transport } from '../../../cli/instruments/transport.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import { parseScpiNumber } from '../../../shared/measure/scpi-value.js';

// How many lines are mangled, and from which seed: REFETTLE_FAULTS and REFETTLE_SEED; the seed is printed with a failure and in the title.
const LINES = Number(process.env['REFETTLE_FAULTS'] || 10_000);
const SEED = Number(process.env['REFETTLE_SEED'] || Date.now() % 1_000_000);
const SENSORS = 6;
const SCALE = 1023;
const PERIOD_US = 10_000;

const chance = seededRandom(SEED);
const below = (count: number): number => Math.floor(chance() * count);
const random = (from: number, to: number): number => from + below(to - from + 1);
const byte = (): string => String.fromCharCode(below(256));
/** Any byte but the line end: that one is damage of its own kind. */
const inLine = (): string => {
  for (;;) {
    const one = byte();
    if (one !== '\n') return one;
  }
};
const cutAt = (text: string, at: number, remove: number, insert = ''): string => text.slice(0, at) + insert + text.slice(at + remove);

/** What happens to a line on the way: one event a line, as a cable, a plug or a full buffer makes it. */
const KINDS: Readonly<Record<string, (line: string) => string>> = {
  'one bit wrong': (line) => {
    const at = below(line.length);
    return cutAt(line, at, 1, String.fromCharCode(line.charCodeAt(at) ^ (1 << below(8))));
  },
  'one byte wrong': (line) => {
    const at = below(line.length);
    return cutAt(line, at, 1, inLine());
  },
  'one byte lost': (line) => cutAt(line, below(line.length), 1),
  'one byte too many': (line) => cutAt(line, below(line.length + 1), 0, inLine()),
  'cut off behind': (line) => line.slice(0, below(line.length)),
  'cut off in front': (line) => line.slice(random(1, line.length)),
  'NULs in it': (line) => cutAt(line, random(1, line.length - 1), 0, '\0'.repeat(random(1, 40))),
  'NULs in place of bytes': (line) => {
    const at = below(line.length);
    const count = random(1, 4);
    return cutAt(line, at, count, '\0'.repeat(count));
  },
  'garbage instead': () => Array.from({ length: random(0, 80) }, inLine).join(''),
  'endless garbage': () => Array.from({ length: random(LONGEST_LINE + 1, 3 * LONGEST_LINE) }, inLine).join(''),
  'the line twice in one': (line) => line + line,
  'another message': () => '0,"No error"',
  'a line end in the middle': (line) => cutAt(line, random(1, line.length - 1), 0, '\n'),
};
const kinds = Object.keys(KINDS);

const sampleAt = (index: number): ProbeSample => ({
  tUs: index * PERIOD_US,
  levels: Array.from({ length: SENSORS }, () => below(SCALE + 1)),
});

/** Text in pieces of any size, as a port delivers it. */
function* chunksOf(text: string): Generator<Buffer> {
  for (let at = 0; at < text.length;) {
    const length = random(1, 97);
    yield Buffer.from(text.slice(at, at + length), 'latin1');
    at += length;
  }
}

const counted = { mangled: 0, dropped: 0, harmless: 0 };
afterAll(() => {
  if (process.env['REFETTLE_FAULTS'] !== undefined)
    process.stdout.write(
      `mangled lines: seed ${SEED}, ${counted.mangled} mangled, ${counted.dropped} dropped, ${counted.harmless} as good as whole\n`,
    );
});

test(`When ${LINES} sample lines are mangled (REFETTLE_SEED=${SEED}), then none becomes a sample, every whole one is found, and losses are counted`, () => {
  const splitter = new LineSplitter();
  const timeline = new SampleTimeline(1_000_000 / PERIOD_US);
  const sent = new Map<number, string>();
  const whole = new Set<number>();
  let text = '';
  let index = 0;
  for (let mangled = 0; mangled < LINES; index += 1) {
    const sample = sampleAt(index);
    const line = writeSampleLine(sample);
    sent.set(sample.tUs, sample.levels.join());
    // The first is whole, so that the capture has a beginning; then whole and mangled ones by turns of chance.
    if (index > 0 && chance() < 0.5) {
      const kind = kinds[mangled % kinds.length] ?? '';
      const hurt = KINDS[kind]?.(line) ?? '';
      text += `${hurt}\r\n`;
      mangled += 1;
      // NULs at the edges, a CR more, or a check in the other case leave a line as good as whole: what it says is what was sent.
      if (
        new LineSplitter().push(Buffer.from(`${hurt}\r\n`, 'latin1')).some((part) => parseSampleLine(part, SENSORS, SCALE) !== undefined)
      ) {
        counted.harmless += 1;
        whole.add(sample.tUs);
      } else counted.dropped += 1;
      counted.mangled += 1;
    } else {
      text += `${line}\r\n`;
      whole.add(sample.tUs);
    }
  }
  const closing = sampleAt(index);
  sent.set(closing.tUs, closing.levels.join());
  whole.add(closing.tUs);
  text += `${writeSampleLine(closing)}\r\n`;

  const got = new Map<number, string>();
  const wrong: ProbeSample[] = [];
  let lost = 0;
  let longest = 0;
  let lastUs = -1;
  for (const chunk of chunksOf(text)) {
    for (const line of splitter.push(chunk)) {
      const sample = parseSampleLine(line, SENSORS, SCALE);
      for (const event of timeline.push(sample, sample?.tUs ?? lastUs)) {
        if (event.kind === 'gap') {
          lost += event.lost;
          continue;
        }
        // A sample that was not sent so is the one thing that must not come: no excuse, its check may be right.
        if (sent.get(event.tUs) !== event.levels.join() || event.tUs <= lastUs) wrong.push({ tUs: event.tUs, levels: event.levels });
        lastUs = event.tUs;
        got.set(event.tUs, event.levels.join());
      }
    }
    longest = Math.max(longest, splitter.unfinished.length);
  }
  expect(wrong, `seed ${SEED}`).toEqual([]);
  expect([...got.keys()].sort((one, other) => one - other)).toEqual([...whole].sort((one, other) => one - other));
  // Every sample that did not come stands in a gap; a line that broke into two damaged ones may count as two.
  const missing = sent.size - got.size;
  expect(lost).toBeGreaterThanOrEqual(missing);
  expect(lost).toBeLessThanOrEqual(missing + counted.mangled / kinds.length + 1);
  expect(longest).toBeLessThanOrEqual(LONGEST_LINE);
  expect(timeline.finish()).toEqual([]);
});

test(`When ${LINES / 10} answers of a meter are mangled (REFETTLE_SEED=${SEED}), then none is the answer to another question, and the next good one is found`, async () => {
  const splitter = new LineSplitter();
  let heard: (line: string) => void = () => undefined;
  let value = 0;
  let hurt: string | undefined;
  const send = (text: string): void => {
    for (const chunk of chunksOf(text)) for (const line of splitter.push(chunk)) heard(line);
  };
  const transport: Transport = {
    instrument: 'M-03',
    port: '/sim/mangled',
    write: (line) => {
      // Each question has its own value, and what is mangled says another: an answer that went astray would show.
      if (line === 'SYSTem:ERRor?') send('0,"No error"\r\n');
      else send(`${hurt === undefined ? '' : `${hurt}\r\n`}+${value}.0E0\r\n`);
      return Promise.resolve();
    },
    onLine: (listener) => ((heard = listener), () => undefined),
    onClose: () => () => undefined,
    pause: () => undefined,
    resume: () => undefined,
    droppedBytes: () => splitter.droppedBytes,
    unfinished: () => splitter.unfinished,
    close: () => Promise.resolve(),
  };
  const conversation = new ScpiConversation(transport, { timeoutMs: 50 });
  let read = 0;
  for (let time = 0; time < LINES / 10; time += 1) {
    value = time + 1;
    hurt = KINDS[kinds[time % kinds.length] ?? '']?.(`+${time}.0E0`);
    const answer = await conversation.askSurely('MEASure:RESistance?').catch((error: unknown) => error);
    // Two different answers to one question: refused, never guessed.
    if (typeof answer !== 'string') expect(answer).toMatchObject({ name: 'TwoAnswersError' });
    else {
      read += 1;
      expect(parseScpiNumber(answer), `seed ${SEED}, question ${time}`).toEqual({ kind: 'value', value });
    }
    hurt = undefined;
    value = 1_000_000 + time;
    expect(parseScpiNumber(await conversation.askSurely('MEASure:RESistance?'))).toEqual({ kind: 'value', value });
  }
  // Lines that are lost whole leave one answer, which is the right one.
  expect(read).toBeGreaterThan(0);
  expect(splitter.unfinished.length).toBeLessThanOrEqual(LONGEST_LINE);
});
