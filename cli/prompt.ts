import type { Readable } from 'node:stream';
import { NobodyToAskError, StoppedError } from './errors.js';
import type { Interruption } from './interruption.js';
import { readKeys } from './keyboard.js';
import type { Output, RawOutput } from './output.js';
import { timeText } from './render/words.js';

export type InputStream = Readable & { isTTY?: boolean; setRawMode?: (raw: boolean) => unknown };

interface Question {
  message: string;
  /** How to answer where nobody is at a terminal: the option to give. */
  instead: string;
}

export interface KeyQuestion extends Question {
  /** The keys that answer, each with its word. Any other key asks again. */
  keys: readonly { key: string; word: string }[];
  /** Said when a key that answers nothing was pressed. */
  again?: string;
}
export interface TextQuestion extends Question {
  initial?: string | undefined;
  /** What is wrong with an answer, or undefined. */
  refuse?: ((answer: string) => string | undefined) | undefined;
}
export interface ChoiceQuestion extends Question {
  choices: readonly { value: string; name: string }[];
}

export interface PickQuestion extends Question {
  choices: readonly { value: string; name: string }[];
  /** Typing narrows the list down, and what is typed may be an answer of its own; otherwise each choice has a number. */
  search?: ((typed: string) => { value: string; name: string } | undefined) | undefined;
}

/** Questions, drawn on standard error. Each refuses with a NobodyToAskError where standard input is no terminal. */
export interface Prompt {
  /** One key of several, with no default: Enter alone asks again. */
  key(question: KeyQuestion): Promise<string>;
  text(question: TextQuestion): Promise<string>;
  secret(question: Question): Promise<string>;
  choice(question: ChoiceQuestion): Promise<string>;
  /** One of a list; undefined: Escape, back to where one came from. */
  pick(question: PickQuestion): Promise<string | undefined>;
}

export interface PromptParts {
  stdin: InputStream;
  output: Output;
  rawOutput: RawOutput;
  interactive: boolean;
  interruption: Interruption;
  now: () => Date;
}

/** Rows of a page of choices: what is left of the screen beside the question, its help and the lines above. */
const ROUND_THE_LIST = 8;
const MIN_PAGE = 5;

export function promptOn({ stdin, output, rawOutput, interactive, interruption, now }: PromptParts): Prompt {
  const needSomebody = ({ message, instead }: Question): void => {
    if (!interactive) throw new NobodyToAskError(message, instead);
  };
  const ask = async (
    question: Question,
    drawn: Record<string, unknown> & { type: 'input' | 'password' | 'select' | 'search' },
    signal?: AbortSignal,
  ): Promise<string> => {
    needSomebody(question);
    if (interruption.interrupted) throw new StoppedError();
    const { default: inquirer } = await import('inquirer');
    try {
      const streams = { input: stdin, output: rawOutput as unknown as NodeJS.WritableStream };
      const prompt = inquirer.createPromptModule({ ...streams, ...(signal ? { signal } : {}) });
      const { answer } = (await prompt([{ ...drawn, name: 'answer', message: question.message }] as never)) as { answer: string };
      return answer;
    } catch (error) {
      if (!(error instanceof Error) || error.name !== 'ExitPromptError') throw error;
      interruption.interrupt();
      throw new StoppedError();
    }
  };
  const pickFrom = async (question: PickQuestion): Promise<string | undefined> => {
    const { search } = question;
    // What stays on the screen of an answer is its first column.
    const choices = question.choices.map((choice) => ({ ...choice, short: choice.name.split(/ {2,}/, 1)[0] ?? choice.name }));
    const { ink } = await output.style();
    const escape = new AbortController();
    let asking = true;
    let again = false;
    const onKeypress = (text: string | undefined, key: { name?: string } | undefined): void => {
      if (key?.name === 'escape') escape.abort();
      if (!search || key?.name !== 'return' || again) return;
      // A scanner sends a number and its Enter in one piece, and the list takes no Enter while it is still looking.
      setImmediate(() => {
        if (!asking) return;
        again = true;
        stdin.emit('keypress', text, key);
        again = false;
      });
    };
    const theme = {
      prefix: '',
      indexMode: 'number',
      style: {
        message: (text: string) => ink.bold(text),
        highlight: (text: string) => ink.bold(text),
        answer: (text: string) => text.trim(),
        keysHelpTip: () =>
          ink.dim(search ? 'type to find, up and down, enter, esc goes back' : 'number or up and down, enter, esc goes back'),
      },
    };
    const list = { pageSize: Math.max(MIN_PAGE, output.rows - ROUND_THE_LIST), loop: false, theme };
    const found = (typed: string | undefined): PickQuestion['choices'] => {
      const text = (typed ?? '').trim();
      const fitting = choices.filter(({ name }) => name.toLowerCase().includes(text.toLowerCase()));
      const own = fitting.length === 0 && text !== '' ? search?.(text) : undefined;
      return own ? [own] : fitting;
    };
    stdin.on('keypress', onKeypress);
    try {
      return await ask(question, search ? { ...list, type: 'search', source: found } : { ...list, type: 'select', choices }, escape.signal);
    } catch (error) {
      if (escape.signal.aborted && error instanceof Error && error.name === 'AbortPromptError') return undefined;
      throw error;
    } finally {
      asking = false;
      stdin.off('keypress', onKeypress);
    }
  };
  return {
    async key(question) {
      needSomebody(question);
      const { ink } = await output.style();
      const row = question.keys.map(({ key, word }) => `${ink.inverse(` ${nameOfKey(key)} `)} ${word}`).join('  ');
      return new Promise<string>((resolve, reject) => {
        let keyboard: { close(): void } | undefined;
        const settle = (end: () => void): void => {
          keyboard?.close();
          interruption.signal.removeEventListener('abort', onStop);
          end();
        };
        const onStop = (): void => settle(() => (output.write('\n'), reject(new StoppedError())));
        if (interruption.interrupted) {
          reject(new StoppedError());
          return;
        }
        interruption.signal.addEventListener('abort', onStop);
        const onKey = (pressed: string): void => {
          const answer = question.keys.find(({ key }) => key === pressed.toLowerCase());
          if (answer) settle(() => (output.write(`${nameOfKey(answer.key)}  ${timeText(now())}\n`), resolve(answer.key)));
          else
            output.write(
              `\n${question.again ?? `${indentOf(question.message)}There is no default: press one of these keys.`}\n${question.message}  ${row}  > `,
            );
        };
        readKeys(stdin, onKey, () => interruption.interrupt()).then((opened) => {
          keyboard = opened;
          if (interruption.interrupted) opened.close();
          else output.write(`${question.message}  ${row}  > `);
        }, reject);
      });
    },
    text: async (question) => {
      const validate = (answer: string): true | string => question.refuse?.(answer.trim()) ?? true;
      const initial = question.initial === undefined ? {} : { default: question.initial };
      return (await ask(question, { type: 'input', validate, ...initial })).trim();
    },
    secret: (question) => ask(question, { type: 'password' }),
    pick: (question) => pickFrom(question),
    choice: (question) => ask(question, { type: 'select', choices: question.choices.map((choice) => ({ ...choice })) }),
  };
}

const nameOfKey = (key: string): string => (key === ' ' ? 'space' : key === '\r' ? 'enter' : key);

/** What is said again stands where the question stands. */
const indentOf = (message: string): string => ' '.repeat(message.length - message.trimStart().length);
