import { expect, test } from 'vitest';
import { coveredSensor } from '../../../cli/bench/sensor-check.js';

test('When a hand darkens one sensor, then it is that one, though its neighbours are shaded too', () => {
  expect(coveredSensor([0.4, 0.4, 0.4], [0.38, 0.05, 0.3])).toBe(1);
});
test('When covering lets in light from a lamp behind, then the change counts whatever its direction', () => {
  expect(coveredSensor([0.1, 0.1], [0.1, 0.6])).toBe(1);
});
test('When no sensor changed clearly, or two changed alike, then none is said to be covered', () => {
  expect(coveredSensor([0.4, 0.4], [0.38, 0.39])).toBeUndefined();
  expect(coveredSensor([0.4, 0.4], [0.1, 0.12])).toBeUndefined();
  expect(coveredSensor([], [])).toBeUndefined();
});
