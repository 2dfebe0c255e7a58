import type { Script } from '../../shared/script/schema.js';
import type { UnitOnBench } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import type { OpenRig } from '../instruments/rig.js';
import { cut, spread, widthOf } from './columns.js';
import { unitLabel } from './words.js';

/** What is run on what, on which rig and by whom: the first words of a run, and of one that is resumed. */
export async function printRunHeader({ stderr }: Context, { page, sheet, by }: UnitOnBench, script: Script, rig: OpenRig): Promise<void> {
  const { ink, columns } = await stderr.style();
  const { number, plate } = page.unit;
  const left = `${ink.bold(unitLabel(number))}  ${plate.maker} ${plate.model}  ${sheet.title ?? sheet.family}`;
  const about = `${script.name}, ${script.steps.length} steps`;
  const whole = spread(left, `${about}   ${rig.name}, ${by.name}`, columns - 1);
  stderr.say(`${widthOf(whole) < columns ? whole : cut(spread(left, about, columns - 1), columns - 1)}\n${'─'.repeat(columns - 1)}`);
}
