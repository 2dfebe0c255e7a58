import { BadInputError } from '../../shared/errors.js';
import { parseAccuracy } from '../../shared/measure/parse-accuracy.js';
import { parseQuantity } from '../../shared/measure/parse-quantity.js';
import type { Verdict } from '../../shared/verdict.js';
import type { Context } from '../context.js';
import type { KeyQuestion } from '../prompt.js';
import { StoppedError, UsageError } from '../errors.js';
import { readIfThere, writeWhole } from '../home.js';
import { parseMoney } from '../money.js';
import { parsePartSource } from '../part-source.js';
import { parseJson } from '../session.js';
import { cautionLines } from '../render/caution-lines.js';
import { indented } from '../render/columns.js';
import { unitSign } from '../../shared/measure/format-reading.js';
import type { Technician, TypedReading } from './technician.js';

const YES_NO = [
  { key: 'y', word: 'yes' },
  { key: 'n', word: 'no' },
] as const;
const INDENT = ' '.repeat(11);

/** What is wrong with a typed answer, in the words of whoever refuses it; undefined where nothing is. */
export function refusalOf(parse: () => unknown): string | undefined {
  try {
    parse();
    return undefined;
  } catch (error) {
    if (error instanceof BadInputError || error instanceof UsageError) return error.message;
    throw error;
  }
}

/** Parks the run at any question that is answered by a key. */
const PARK = { key: 'k', word: 'park' } as const;

/** A person at the terminal. Questions name what to do where nobody is there. `parks`: what is done can be left and gone on with later. */
export function terminalTechnician(context: Context, currency: string, { parks = false } = {}): Technician {
  const { prompt, stderr } = context;
  const instead = 'run it at a terminal';
  const pressed = async (question: Omit<KeyQuestion, 'instead'>): Promise<string> => {
    const key = await prompt.key({ ...question, keys: parks ? [...question.keys, PARK] : question.keys, instead });
    if (parks && key === PARK.key) throw new StoppedError('Parked. What was recorded is kept.');
    return key;
  };
  const yes = async (message: string): Promise<boolean> => (await pressed({ message, keys: YES_NO })) === 'y';
  return {
    attended: true,
    async confirms(_stepId, text) {
      stderr.write(`\n${cautionLines(text, await stderr.style()).join('\n')}\n`);
      return (await pressed({
        message: `${INDENT}Done?`,
        keys: YES_NO,
        again: `${INDENT}A caution has no default: press y or n.`,
      })) === 'y'
        ? 'yes'
        : 'no';
    },
    hasDone: (_stepId, _kind, question) => yes(`${INDENT}${question}`),
    async looks(_stepId, question) {
      stderr.say(`${indented([question], stderr.columns).join('\n')}`);
      const keys = [
        { key: 'p', word: 'pass' },
        { key: 'f', word: 'fail' },
        { key: 'i', word: 'inconclusive' },
      ];
      const key = await pressed({ message: `${INDENT}Verdict?`, keys });
      const verdict = (keys.find((one) => one.key === key)?.word ?? 'inconclusive') as Verdict;
      if (verdict === 'pass') return { verdict };
      const note = await prompt.text({ message: 'What was seen', instead });
      return { verdict, ...(note === '' ? {} : { note }) };
    },
    async mended(_stepId, { part: suggested, optional, parts }) {
      if (optional && !(await yes(`${INDENT}Was something mended?`))) return undefined;
      if (parts.length > 0) stderr.write(`${INDENT}Parts of the sheet: ${parts.join(', ')}\n`);
      const part = await prompt.text({
        message: 'Part, or what was done',
        initial: suggested,
        refuse: (text) => (text === '' ? 'say what was mended' : undefined),
        instead,
      });
      const source = await prompt.text({
        message: 'Part from: new, used:NUMBER, or none',
        initial: 'new',
        refuse: (text) => refusalOf(() => parsePartSource(text)),
        instead,
      });
      const minutes = await prompt.text({
        message: 'Minutes',
        refuse: (text) => (/^\d{1,4}$/.test(text) ? undefined : 'whole minutes, please'),
        instead,
      });
      const cost = await prompt.text({
        message: `Cost of the part, ${currency}`,
        initial: '0',
        refuse: (text) => refusalOf(() => parseMoney(text, currency, 'Cost')),
        instead,
      });
      const note = await prompt.text({ message: 'Remark (may stay empty)', instead });
      return {
        part,
        partSource: parsePartSource(source),
        minutes: Number(minutes),
        costMinor: parseMoney(cost, currency, 'Cost'),
        ...(note === '' ? {} : { note }),
      };
    },
    remarks: (_stepId, question) => prompt.text({ message: `${question} (may stay empty)`, instead }),
    async reads(_stepId, { title, quantity, unit }) {
      const file = context.home.path('cache', 'typed-meters.json');
      const known = knownMeters(readIfThere(file));
      const last = known[quantity];
      const value = await prompt.text({
        message: `${title}, in ${unitSign(unit)}`,
        refuse: (text) => refusalOf(() => parseQuantity(text)),
        instead: 'give it with --value',
      });
      const meter = await prompt.text({ message: 'Which meter', initial: last?.meter, instead: 'give it with --meter' });
      const accuracy = await prompt.text({
        message: 'Its accuracy, as its data sheet has it (like 0.8%+3)',
        initial: last?.accuracy,
        refuse: (text) => refusalOf(() => parseAccuracy(text)),
        instead: 'give it with --accuracy',
      });
      const resolution = await prompt.text({
        message: `Value of its last digit, in ${unitSign(unit)}`,
        initial: last?.resolution,
        refuse: (text) => refusalOf(() => parseQuantity(text)),
        instead: 'give it with --resolution',
      });
      writeWhole(file, JSON.stringify({ ...known, [quantity]: { meter, accuracy, resolution } }));
      return { value, accuracy, resolution, ...(meter === '' ? {} : { meter }) };
    },
    triesAgain: (_stepId, why) => yes(`${INDENT}${why}`),
  };
}

/** What was typed last time for each quantity: a shop has few handheld meters. */
function knownMeters(text: string | undefined): Record<string, Omit<TypedReading, 'value'> | undefined> {
  const value = text === undefined ? undefined : parseJson(text);
  return typeof value === 'object' && value !== null ? (value as Record<string, Omit<TypedReading, 'value'>>) : {};
}
