import { scpiHeaderMatches } from '../../../shared/measure/scpi-header.js';
import type { SimulatedInstrument } from './simulated-port.js';

/** One command that an instrument knows; `answer` gives the response, or undefined where there is none. */
export interface ScpiCommand {
  pattern: string;
  /** Whether a parameter must follow. */
  parameter?: 'required';
  run: (parameter: string, refuse: (number: number, text: string) => void) => string | undefined;
}

/** Entries an error queue holds; the last one then becomes -350 (SCPI-99 volume 2, SYSTem:ERRor). */
const ERROR_QUEUE_LENGTH = 20;

/**
 * The part all simulated instruments share: `*IDN?`, `*CLS`, `SYSTem:ERRor?`, chained commands, and the error queue.
 * Error numbers and texts: SCPI-99 volume 2, chapter 21.
 */
export class SimulatedScpi implements SimulatedInstrument {
  readonly #identification: string;
  readonly #commands: readonly ScpiCommand[];
  #errors: string[] = [];
  /** Lines that came while it was busy with an answer; undefined while it is not. */
  #waitingLines: string[] | undefined;
  #busy: NodeJS.Timeout | undefined;
  #send: ((text: string) => void) | undefined;

  constructor(identification: string, commands: readonly ScpiCommand[]) {
    this.#identification = identification;
    this.#commands = [
      { pattern: '*IDN?', run: () => this.#identification },
      { pattern: '*CLS', run: () => void (this.#errors = []) },
      { pattern: 'SYSTem:ERRor[:NEXT]?', run: () => this.#errors.shift() ?? '0,"No error"' },
      ...commands,
    ];
  }

  connect(send: (text: string) => void): void {
    this.#send = send;
  }

  disconnect(): void {
    clearTimeout(this.#busy);
    this.#waitingLines = undefined;
    this.#send = undefined;
  }

  /** The answer comes as it is, after so long; an instrument answers in order, so what is asked meanwhile waits. */
  protected answerLater(text: string, milliseconds: number): undefined {
    this.#waitingLines ??= [];
    this.#busy = setTimeout(() => {
      const lines = this.#waitingLines ?? [];
      this.#waitingLines = undefined;
      this.transmit(text);
      for (const line of lines) this.receive(line);
    }, milliseconds);
  }

  receive(line: string): void {
    if (this.#waitingLines !== undefined) {
      this.#waitingLines.push(line);
      return;
    }
    const answers = line
      .split(';')
      .map((message) => message.trim())
      .filter((message) => message !== '')
      .map((message) => this.#obey(message))
      .filter((answer) => answer !== undefined);
    if (answers.length > 0) this.transmit(`${answers.join(';')}\n`);
  }

  /** Sends text as it is. */
  protected transmit(text: string): void {
    this.#send?.(text);
  }

  protected get connected(): boolean {
    return this.#send !== undefined;
  }

  #obey(message: string): string | undefined {
    const [header = '', ...rest] = message.split(/\s+/);
    const parameter = rest.join(' ');
    const command = this.#commands.find(({ pattern }) => scpiHeaderMatches(pattern, header));
    if (command === undefined) return this.#refuse(-113, `Undefined header;${header}`);
    if (command.parameter === 'required' && parameter === '') return this.#refuse(-109, 'Missing parameter');
    // A parameter too many is reported, and the query answered all the same.
    if (command.parameter === undefined && parameter !== '') this.#refuse(-108, 'Parameter not allowed');
    return command.run(parameter, (number, text) => void this.#refuse(number, text));
  }

  #refuse(number: number, text: string): undefined {
    if (this.#errors.length >= ERROR_QUEUE_LENGTH) this.#errors[ERROR_QUEUE_LENGTH - 1] = '-350,"Queue overflow"';
    else this.#errors.push(`${number},"${text}"`);
  }
}
