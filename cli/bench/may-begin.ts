import { mayHoldCharge } from '../../shared/readiness/gates.js';
import { stepGate } from '../../shared/readiness/run-gates.js';
import { energisingOf } from '../../shared/script/energised.js';
import { sinceOpened } from '../../shared/readiness/facts.js';
import type { Step } from '../../shared/script/schema.js';
import type { Context } from '../context.js';
import { cautionLines } from '../render/caution-lines.js';
import { MAY_BE_CHARGED } from '../render/charge-words.js';
import { NobodyToAskError } from '../errors.js';
import type { OpenRig } from '../instruments/rig.js';
import { simulatedTechnician } from './simulated-technician.js';
import type { Technician } from './technician.js';
import { terminalTechnician } from './terminal-technician.js';
import type { UnitOnBench } from './unit-on-bench.js';

export interface BeginParts {
  context: Context;
  unit: UnitOnBench;
  /** None: by keys, or typed in. A person does it on a real machine. */
  rig: OpenRig | undefined;
  step: Step;
  caution: string;
  /** Was done by hand already; the caution is only shown. */
  alreadyDone?: boolean;
}

/**
 * The same gates for a step that is done outside a script: dead tests before power, and a caution with no default before anything
 * energised. Gives who is at the bench, or undefined where it may not begin; that was said then. No port is open yet.
 */
export async function mayBegin({ context, unit, rig, step, caution, alreadyDone = false }: BeginParts): Promise<Technician | undefined> {
  const { stderr } = context;
  const simulated = rig?.simulated === true;
  const gate = stepGate(step, unit.sheet, unit.facts, simulated);
  if (!gate.open) {
    stderr.say(`A safety gate is shut: ${gate.reasons.join('; ')}.${gate.remedy === undefined ? '' : `\nTo open it: ${gate.remedy}.`}`);
    return undefined;
  }
  if (mayHoldCharge(unit.facts.events)) stderr.say(MAY_BE_CHARGED);
  if (gate.override)
    stderr.say(`The dead tests are missing (${gate.reasons.join('; ')}); ${gate.override.by} opened the gate: ${gate.override.reason}`);
  if (simulated && sinceOpened(unit.facts.events).some((event) => event.kind === 'repair')) rig?.hands?.repaired();

  const technician = context.interactive
    ? terminalTechnician(context, unit.me.shop.currency)
    : rig?.hands
      ? simulatedTechnician(context, rig.hands)
      : undefined;
  if (energisingOf(step, unit.sheet) === 'dead') return technician ?? nobody(context, unit);
  if (alreadyDone) {
    stderr.say(cautionLines(caution, await stderr.style()).join('\n'));
    return technician ?? nobody(context, unit);
  }
  if (!technician)
    throw new NobodyToAskError(
      'This energises the machine, and its caution waits for a person. No port was opened.',
      'run it at a terminal',
    );
  if (!technician.attended) stderr.say(cautionLines(caution, await stderr.style()).join('\n'));
  if ((await technician.confirms(step.id, caution)) === 'yes') return technician;
  stderr.say('Not begun. Nothing was recorded.');
  return undefined;
}

/** Where nobody sits there: whatever must be asked says so. */
const nobody = (context: Context, unit: UnitOnBench): Technician => ({
  ...terminalTechnician(context, unit.me.shop.currency),
  attended: false,
});
