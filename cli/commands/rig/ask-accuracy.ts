import { baseUnitOf } from '../../../shared/measure/convert-unit.js';
import { parseAccuracy } from '../../../shared/measure/parse-accuracy.js';
import { parseQuantity } from '../../../shared/measure/parse-quantity.js';
import { measuredCheckSchema } from '../../../shared/sheet/schema.js';
import { refusalOf } from '../../bench/terminal-technician.js';
import type { Context } from '../../context.js';
import { MEASURE_COMMANDS, type Quantity } from '../../instruments/meter.js';
import type { MeterRange, RigMeter, Specification } from '../../instruments/rig-file.js';

const INSTEAD = 'run it at a terminal, or write it into the rig file';
const UNITS: Readonly<Record<Quantity, Specification['unit']>> = {
  resistance: 'ohm',
  'insulation resistance': 'Mohm',
  'voltage ac': 'V',
  'voltage dc': 'V',
  'current ac': 'mA',
  capacitance: 'uF',
  temperature: 'degC',
};
/** What each kind of instrument is bought for; it may measure more. */
const LIKELY: Readonly<Record<RigMeter['kind'], readonly Quantity[]>> = {
  meter: ['resistance', 'voltage ac', 'voltage dc', 'capacitance', 'temperature', 'current ac'],
  'insulation-tester': ['insulation resistance', 'resistance'],
  'leakage-meter': ['current ac', 'resistance'],
};
const NO_MORE = 'no more';

/** Asks what kind of meter it is, and its accuracy for each function, as the sheet of its manual prints it. `taken`: what others are called. */
export async function askMeter(context: Context, meter: RigMeter, taken: readonly string[]): Promise<RigMeter> {
  const { prompt, stderr } = context;
  stderr.say(`${meter.identification ?? meter.id} is not in the rig file yet, or its accuracy is asked anew.`);
  const id = await prompt.text({
    message: 'What the shop calls it',
    initial: meter.id,
    refuse: (text) =>
      text === ''
        ? 'it needs a name, like M-03'
        : taken.includes(text)
          ? `${text} is the name of another instrument of this rig`
          : undefined,
    instead: INSTEAD,
  });
  const kind = (await prompt.choice({
    message: 'What it is',
    choices: (['meter', 'insulation-tester', 'leakage-meter'] as const).map((value) => ({ value, name: value.replace('-', ' ') })),
    instead: INSTEAD,
  })) as RigMeter['kind'];
  stderr.say('Now its accuracy, as the table in its manual has it. Smallest range first.');
  const accuracy: RigMeter['accuracy'] = {};
  for (;;) {
    const left = LIKELY[kind].filter((quantity) => accuracy[quantity] === undefined);
    if (left.length === 0) break;
    const choices = [...left, NO_MORE].map((value) => ({ value, name: value }));
    const quantity = await prompt.choice({ message: 'Which function', choices, instead: INSTEAD });
    if (quantity === NO_MORE) break;
    accuracy[quantity as Quantity] = await askSpecification(context, quantity as Quantity);
  }
  return { ...meter, id, kind, accuracy };
}

async function askSpecification({ prompt }: Context, quantity: Quantity): Promise<Specification> {
  const expected = MEASURE_COMMANDS[quantity].unit;
  const units = measuredCheckSchema.shape.unit.options.filter((unit) => baseUnitOf(unit) === expected);
  const unit = (await prompt.text({
    message: `${quantity}, in which unit (${units.join(', ')})`,
    initial: UNITS[quantity],
    refuse: (text) => (units.some((one) => one === text) ? undefined : `one of ${units.join(', ')}`),
    instead: INSTEAD,
  })) as Specification['unit'];
  const ranges: MeterRange[] = [];
  for (;;) {
    const from = ranges.at(-1)?.upTo ?? 0;
    const upTo = await prompt.text({
      message: `End of the range in ${unit} (empty: its last or only one)`,
      refuse: (text) =>
        text === '' ? undefined : (refusalOf(() => parseQuantity(text)) ?? (parseQuantity(text) > from ? undefined : `more than ${from}`)),
      instead: INSTEAD,
    });
    const accuracy = await prompt.text({
      message: 'Its accuracy (like 0.5%+3)',
      refuse: (text) => refusalOf(() => parseAccuracy(text)),
      instead: INSTEAD,
    });
    const resolution = await prompt.text({
      message: `Value of its last digit, in ${unit}`,
      refuse: (text) => refusalOf(() => parseQuantity(text)) ?? (parseQuantity(text) > 0 ? undefined : 'more than 0'),
      instead: INSTEAD,
    });
    const range = { accuracy, resolution: parseQuantity(resolution) };
    ranges.push(upTo === '' ? range : { upTo: parseQuantity(upTo), ...range });
    if (upTo === '') return { unit, ranges };
  }
}
