// A single capture whose probe is pulled out, on a bench without a network.
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, expect, test } from 'vitest';
import { HERON_MEND } from '../../../cli/instruments/simulated/scenarios/heron-mend.js';
import { waitingEntries } from '../../../cli/journal/outbox.js';
import { runProgram } from '../../../cli/program.js';
import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import type { BenchTerminal } from '../../helpers/bench-terminal.js';
import { offlineBench } from '../../helpers/offline-bench.js';
import { deadTests, heron, intake } from '../../helpers/unit-facts.js';

let bench: BenchTerminal;
afterEach(() => bench.remove());

test('When the probe is gone for good after a code was shown, then those lamps are recorded all the same, and it is an instrument’s fault', async () => {
  bench = offlineBench([intake(), ...deadTests({ simulated: true })]);
  const file = join(bench.home, 'pulled.yaml');
  writeFileSync(file, `${HERON_MEND}\nreconnectSeconds: 0\nprobeFaults: [{fault: unplug, at: 24, seconds: 60}]\n`);
  expect(await runProgram(['capture', '412', '--seconds', '45', '--rig', `sim:${file}`], bench.context)).toBe(4);
  const [entry, ...more] = waitingEntries(bench.context.home).entries;
  expect(more).toEqual([]);
  const lamps = entry?.route === 'recordCapture' ? readCapture(entry.body.file) : undefined;
  expect(lamps?.cut).toBe(true);
  // The scenario heron-mend shows G5K3 from 6 s to 25 s.
  expect(lamps && decodeCapture(lamps, heron).codes.map(({ code }) => code)).toEqual(['G5K3']);
  expect(bench.stderr()).toContain('it was unplugged or switched off');
});
