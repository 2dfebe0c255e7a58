import { expect, test } from 'vitest';
import { viewCapture } from '../../../shared/decode/view-capture.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { exampleText, heron } from '../../helpers/fixtures.js';

// Levels computed from the file itself: Fill rests at 40 and shines at 585 counts, Drain at 76 and 729 (means of settled samples).
const view = viewCapture(readCapture(exampleText('captures/01-one-code.lamps.ndjson')), heron);
const lamp = (id: string) => view.lamps.find((candidate) => candidate.id === id);

test('When a capture is viewed, then lamps stand in panel order with their levels', () => {
  expect(view.lamps.map(({ id }) => id)).toEqual(['fill', 'wash', 'rinse', 'drain', 'spin', 'lock']);
  expect(Math.abs((lamp('fill')?.litLevel ?? 0) - 585)).toBeLessThan(8);
  expect(Math.abs((lamp('fill')?.threshold ?? 0) - (40 + 585) / 2)).toBeLessThan(8);
  expect(lamp('fill')?.litFraction).toBeCloseTo(585 / 1023, 1);
});

test('When a lamp is lit in the ready blink alone, then its lit stretches are those six', () => {
  // examples/decode.json: ready blink 0.8 to 5.75 s; six blinks of 0.45 s every 0.9 s.
  const lit = lamp('drain')?.lit ?? [];
  expect(lit).toHaveLength(6);
  lit.forEach(({ fromS, toS }, blink) => {
    expect(Math.abs(fromS - (0.8 + 0.9 * blink))).toBeLessThan(0.05);
    expect(Math.abs(toS - (1.25 + 0.9 * blink))).toBeLessThan(0.05);
  });
});

test('When phases are viewed, then they take turns between the two digits', () => {
  expect(view.phases).toHaveLength(16);
  view.phases.forEach((phase, index) => {
    expect(phase).toMatchObject({ selectorLit: index % 2 === 0, digit: index % 2 === 0 ? 5 : 3, whole: true });
    expect(phase.toS - phase.fromS).toBeCloseTo(1.2, 1);
  });
});

test('When nothing was ever lit, then there is no threshold and no lit level', () => {
  const dark = viewCapture(readCapture(exampleText('captures/14-all-dark.lamps.ndjson')), heron);
  expect(
    dark.lamps.every(
      ({ threshold, litLevel, litFraction, lit }) => threshold === null && litLevel === null && litFraction === null && lit.length === 0,
    ),
  ).toBe(true);
  expect(dark.phases).toEqual([]);
});

test('When there are no samples or the selector is missing, then there are no phases', () => {
  expect(viewCapture(readCapture(exampleText('captures/26-no-samples.lamps.ndjson')), heron)).toEqual({ lamps: [], phases: [] });
  const missing = viewCapture(readCapture(exampleText('captures/18-missing-column.lamps.ndjson')), heron);
  expect(missing.phases).toEqual([]);
  expect(missing.lamps.map(({ id }) => id)).toEqual(['fill', 'wash', 'rinse', 'drain', 'lock']);
});
