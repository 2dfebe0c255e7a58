import { afterEach, beforeEach, expect, test } from 'vitest';
import { watchLevels } from '../../../cli/bench/level-watch.js';
import type { ProbeEvent } from '../../../cli/instruments/rig.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';

let bench: BenchTerminal;
beforeEach(() => {
  bench = benchTerminal();
});
afterEach(() => bench.remove());

/** How often a wait passes before the probe sends: longer than levels are averaged over. */
const SILENT_WAITS = 5;

/** A probe of one sensor that sends nothing for a while, then what it does. Time is made up: a sleep only lets others have their turn. */
function watched(then: 'sends' | 'fails' | 'is stopped') {
  let waits = 0;
  let goOn: () => void = () => undefined;
  const sending = new Promise<void>((go) => (goOn = go));
  const context = {
    ...bench.context,
    sleep: async () => {
      waits += 1;
      if (waits === SILENT_WAITS) {
        if (then === 'is stopped') bench.context.interruption.interrupt();
        goOn();
      }
      await new Promise((turn) => setImmediate(turn));
    },
  };
  const probe = {
    async *read(signal: AbortSignal): AsyncGenerator<ProbeEvent> {
      await sending;
      if (then === 'fails') throw new Error('the probe is silent');
      for (let index = 0; index < 30 && !signal.aborted; index += 1) yield { kind: 'sample', tUs: index * 10_000, levels: [60] };
    },
  };
  return { levels: watchLevels(context, probe, { columns: 1, scaleMax: 100 }).settled(), waits: () => waits };
}

test('When no sample comes for a while, then levels are waited for: they are never said to be dark', async () => {
  const { levels, waits } = watched('sends');
  const [level] = await levels;
  expect(level).toBeCloseTo(0.6);
  expect(waits()).toBeGreaterThanOrEqual(SILENT_WAITS);
});

test('When the probe fails meanwhile, or the technician stops, then there is no level', async () => {
  await expect(watched('fails').levels).rejects.toThrow('the probe is silent');
  await expect(watched('is stopped').levels).rejects.toMatchObject({ name: 'StoppedError' });
});
