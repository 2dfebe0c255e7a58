// Times are made up; what must come out follows from "never backwards, never faster than the counter after a step back".
import { expect, test } from 'vitest';
import { SteadyClock } from '../../../cli/journal/steady-clock.js';

const START = Date.parse('2026-03-05T09:00:00.000Z');

function clockOf(notBefore?: string) {
  const jumps: { seconds: number }[] = [];
  const time = { wallMs: START, countMs: 500 };
  const clock = new SteadyClock(
    () => new Date(time.wallMs),
    () => time.countMs,
    (jump) => jumps.push(jump),
    notBefore,
  );
  return {
    jumps,
    /** So many seconds pass; the wall clock is set by so many on top. */
    pass: (seconds: number, setBy = 0): string => {
      time.countMs += seconds * 1000;
      time.wallMs += (seconds + setBy) * 1000;
      return clock.now().toISOString().slice(11, 19);
    },
  };
}

test('When nobody touches the clock, then the time is that of the wall', () => {
  const { pass, jumps } = clockOf();
  expect([pass(10), pass(0), pass(3600)]).toEqual(['09:00:10', '09:00:10', '10:00:10']);
  expect(jumps).toEqual([]);
});

test('When the clock is set forward, then the log goes along and the jump is told', () => {
  const { pass, jumps } = clockOf();
  expect([pass(10), pass(10, 3600), pass(10)]).toEqual(['09:00:10', '10:00:20', '10:00:30']);
  expect(jumps.map(({ seconds }) => seconds)).toEqual([3600]);
});

test('When the clock is set back, then time goes on from where it was, and never backwards', () => {
  const { pass, jumps } = clockOf();
  expect([pass(10), pass(10, -3600), pass(10), pass(5, -60)]).toEqual(['09:00:10', '09:00:20', '09:00:30', '09:00:35']);
  expect(jumps.map(({ seconds }) => seconds)).toEqual([-3600, -60]);
});

test('When the clock is only kept right, then nothing is told', () => {
  const { pass, jumps } = clockOf();
  pass(600, 0.5);
  pass(600, -1.5);
  expect(jumps).toEqual([]);
});

test('When the log holds later times already, then it goes on from them and says that the clock was set back', () => {
  const { pass, jumps } = clockOf('2026-03-05T09:30:00.000Z');
  expect(pass(10)).toBe('09:30:10');
  expect(jumps).toMatchObject([{ seconds: -1800, at: '2026-03-05T09:30:00.000Z' }]);
});

test('When the log’s last time lies in the past, as after a night, then that is no jump', () => {
  const { pass, jumps } = clockOf('2026-03-04T17:00:00.000Z');
  expect(pass(10)).toBe('09:00:10');
  expect(jumps).toEqual([]);
});
