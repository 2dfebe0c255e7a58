import { expect, test } from 'vitest';
import { LampWindow } from '../../../cli/bench/lamp-window.js';
import { understand } from '../../../cli/bench/live-view.js';
import { readSheet } from '../../../shared/sheet/read-sheet.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import { shopFileText } from '../../helpers/factories.js';
import { simulateCapture } from '../../helpers/simulate-captures.js';

const sheet = readSheet(shopFileText('heron-h6.yaml'));

/** A ready blink, and then G4K2 for so long: neither Fill (1) nor Drain (8) is lit in it. */
function minutes(repeats: number) {
  return simulateCapture(
    {
      ready: { times: 4, periodS: 0.8 },
      codes: [{ on: 4, off: 2, repeats }],
      phaseS: 1.5,
      light: { sampleRateHz: 50, noise: 0.01 },
    },
    sheet,
    seededRandom(4),
  ).capture;
}

test('When a code goes on for minutes, then the lamps that the ready blink proved stay proved', () => {
  const capture = minutes(80);
  const window = new LampWindow(capture.header);
  capture.timesUs.forEach((tUs, at) => {
    window.push({ kind: 'sample', tUs, levels: capture.levels.map((levels) => levels[at] ?? 0) });
    if (at % 2000 === 0) understand(window, sheet);
  });
  expect(window.lastUs).toBeGreaterThan(200_000_000);
  const { codes, segments } = understand(window, sheet);
  // A window alone knows nothing of it: two lamps were never seen lit there.
  expect(segments.map(({ kind }) => kind)).not.toContain('unreadable');
  expect(codes.map(({ code }) => code)).toEqual(['G4K2']);
});
