import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { StoppedError } from '../errors.js';
import type { OpenRig } from '../instruments/rig.js';
import { watchLevels, type LevelWatch } from './level-watch.js';

/** A hand over a sensor changes its level by at least this share of full scale (common practice, no published source). */
const COVERED_CHANGE = 0.05;
/** And by at least this much more than any other sensor's, which the same hand shades. */
const CLEARLY_MORE = 1.5;

/**
 * Which sensor a hand covers: the one whose level changed most since before, if it changed clearly. Levels 0 to 1 of full scale.
 *
 * @example coveredSensor([0.4, 0.4], [0.4, 0.02]) // 1
 */
export function coveredSensor(before: readonly number[], now: readonly number[]): number | undefined {
  const changes = before.map((level, index) => Math.abs(level - (now[index] ?? level)));
  const order = changes.map((_change, index) => index).sort((a, b) => (changes[b] ?? 0) - (changes[a] ?? 0));
  const [first, second] = order;
  if (first === undefined || (changes[first] ?? 0) < COVERED_CHANGE) return undefined;
  return second === undefined || (changes[first] ?? 0) >= CLEARLY_MORE * (changes[second] ?? 0) ? first : undefined;
}

/**
 * Before the first capture of a run the technician covers the sensors one by one, in panel order, and the terminal checks that the
 * right one answers (contract, section 6). A probe that hangs one lamp off makes a wrong code, not a missing one.
 */
export async function checkSensors(context: Context, rig: OpenRig, sheet: Sheet): Promise<void> {
  const { prompt, stderr } = context;
  const probe = await rig.openProbe(sheet.lamps.map((lamp) => lamp.id));
  const watch = watchLevels(context, probe, { columns: sheet.lamps.length, scaleMax: probe.scaleMax });
  try {
    stderr.say('           Before the first capture: is each sensor on its own lamp? The machine stays dark for this.');
    // With every sensor free: the hand is still on the last lamp when the next one is asked for.
    let free = await watch.settled();
    for (const [index, lamp] of sheet.lamps.entries()) {
      for (;;) {
        const keys = [
          { key: ' ', word: 'covered' },
          { key: 'q', word: 'leave' },
        ] as const;
        const key = await prompt.key({
          message: `           Cover the sensor on ${lamp.label}, keep it covered`,
          keys,
          instead: 'run it at a terminal',
        });
        if (key === 'q') throw new StoppedError();
        const covered = coveredSensor(free, await watch.settled());
        if (covered === index) break;
        const seen = covered === undefined ? 'No sensor changed clearly.' : `The sensor for ${sheet.lamps[covered]?.label ?? ''} changed.`;
        stderr.say(`           ${seen} Move the sensors, or write their order down: refettle rig check finds it.`);
        await prompt.key({
          message: '           Take the hand away',
          keys: [{ key: ' ', word: 'it is away' }],
          instead: 'run it at a terminal',
        });
        free = await watch.settled();
      }
    }
    stderr.say('           Every sensor is on its lamp.');
  } finally {
    await watch.close();
  }
}

/** What stands in a rig file for a sensor that looks at no lamp. */
const unusedSensor = (index: number): string => `unused-${index + 1}`;

/**
 * Which sensor looks at which lamp, found by a hand: the technician covers the sensors in panel order, and which one changes is written
 * down. Gives a lamp a sensor, in sensor order, as the rig file has it.
 */
export async function findSensorOrder(
  context: Context,
  watch: LevelWatch,
  lamps: readonly { id: string; label: string }[],
  sensorCount: number,
): Promise<string[]> {
  const { prompt, stderr } = context;
  const instead = 'run it at a terminal';
  const found: (string | undefined)[] = Array.from({ length: sensorCount }, () => undefined);
  const free = await watch.settled();
  for (const lamp of lamps) {
    for (;;) {
      const keys = [
        { key: ' ', word: 'covered' },
        { key: 's', word: 'it has no sensor' },
        { key: 'q', word: 'leave' },
      ] as const;
      const key = await prompt.key({ message: `Cover the sensor on ${lamp.label}, keep it covered`, keys, instead });
      if (key === 'q') throw new StoppedError('Stopped. Nothing was written.');
      if (key === 's') break;
      const sensor = coveredSensor(free, await watch.settled());
      const taken = sensor === undefined ? undefined : lamps.find(({ id }) => id === found[sensor]);
      if (sensor !== undefined && taken === undefined) {
        found[sensor] = lamp.id;
        stderr.say(`  Sensor ${sensor + 1} looks at ${lamp.label}.`);
        break;
      }
      stderr.say(
        sensor === undefined
          ? '  No sensor changed clearly: cover it wholly, with light from the room on the others.'
          : `  That is sensor ${sensor + 1}, which looks at ${taken?.label ?? ''}. Take the hand away there.`,
      );
    }
  }
  return found.map((lamp, index) => lamp ?? unusedSensor(index));
}
