import { parseScpiError, type ScpiError } from '../../shared/measure/scpi-error.js';
import { parseIdentification, type Identification } from '../../shared/measure/scpi-identification.js';
import { InstrumentTimeoutError, type InstrumentError } from './instrument-error.js';
import type { Transport } from './transport.js';

/** Long enough for a slow instrument to say who it is. */
export const USUAL_TIMEOUT_MS = 2000;
/** An error queue is emptied with that many questions at most; queues hold 20 or 30. */
const LONGEST_ERROR_QUEUE = 50;
const ERROR_QUERY = 'SYSTem:ERRor?';

interface Waiter {
  accepts: (line: string) => boolean;
  resolve: (line: string) => void;
  reject: (error: InstrumentError) => void;
}

export interface ConversationOptions {
  timeoutMs?: number | undefined;
  /** Lines that are no answers, such as samples that a probe sends on its own. */
  passOver?: ((line: string) => boolean) | undefined;
}

/**
 * Questions and answers with one SCPI instrument. One question is in flight at a time; its waiter stands before the bytes go
 * out; every question has a time-out; when the port goes, everything pending is refused.
 *
 * After a time-out an answer may still come, and must not be taken for the answer to the next question. So before the next
 * question the error queue is read: its entries look like nothing else, and what stands before them is stale.
 */
export class ScpiConversation {
  /** Lines that came when nothing was asked, or were stale. */
  unasked = 0;
  readonly #transport: Transport;
  readonly #timeoutMs: number;
  #waiter: Waiter | undefined;
  #lastTurn: Promise<unknown> = Promise.resolve();
  #outOfStep = true;

  constructor(transport: Transport, options: ConversationOptions = {}) {
    this.#transport = transport;
    this.#timeoutMs = options.timeoutMs ?? USUAL_TIMEOUT_MS;
    transport.onLine((line) => {
      if (options.passOver?.(line) === true) return;
      if (this.#waiter?.accepts(line) === true) this.#waiter.resolve(line);
      else this.unasked += 1;
    });
    transport.onClose((reason) => this.#waiter?.reject(reason));
  }

  /** Sends a query and gives back the line it is answered with. */
  ask(query: string, options: { timeoutMs?: number | undefined } = {}): Promise<string> {
    return this.#inTurn(async () => {
      if (this.#outOfStep) await this.#readErrors();
      return this.#exchange(query, () => true, options.timeoutMs ?? this.#timeoutMs);
    });
  }

  /** Sends a command that has no answer. */
  tell(command: string): Promise<void> {
    return this.#inTurn(() => this.#write(command, this.#timeoutMs));
  }

  /** Reads the instrument's error queue until it is empty; oldest first. Also falls into step with the instrument. */
  errors(): Promise<ScpiError[]> {
    return this.#inTurn(() => this.#readErrors());
  }

  async identify(): Promise<Identification & { text: string }> {
    const text = await this.ask('*IDN?');
    return { ...parseIdentification(text), text };
  }

  /** Says that the last answer made no sense: the next question first falls into step again. */
  doubt(): void {
    this.#outOfStep = true;
  }

  async #readErrors(): Promise<ScpiError[]> {
    const errors: ScpiError[] = [];
    while (errors.length < LONGEST_ERROR_QUEUE) {
      const entry = parseScpiError(await this.#exchange(ERROR_QUERY, (line) => parseScpiError(line) !== undefined, this.#timeoutMs));
      if (entry === undefined || entry.number === 0) break;
      errors.push(entry);
    }
    this.#outOfStep = false;
    return errors;
  }

  async #exchange(query: string, accepts: (line: string) => boolean, timeoutMs: number): Promise<string> {
    let timer: NodeJS.Timeout | undefined;
    try {
      return await new Promise<string>((resolve, reject) => {
        this.#waiter = { accepts, resolve, reject };
        timer = setTimeout(() => reject(new InstrumentTimeoutError(this.#transport, query, timeoutMs)), timeoutMs);
        this.#transport.write(query).catch(reject);
      });
    } catch (error) {
      this.#outOfStep = true;
      throw error;
    } finally {
      clearTimeout(timer);
      this.#waiter = undefined;
    }
  }

  async #write(command: string, timeoutMs: number): Promise<void> {
    let timer: NodeJS.Timeout | undefined;
    const timeout = new Promise<never>((_resolve, reject) => {
      timer = setTimeout(() => reject(new InstrumentTimeoutError(this.#transport, command, timeoutMs)), timeoutMs);
    });
    try {
      await Promise.race([this.#transport.write(command), timeout]);
    } finally {
      clearTimeout(timer);
    }
  }

  #inTurn<T>(turn: () => Promise<T>): Promise<T> {
    const mine = this.#lastTurn.then(turn, turn);
    this.#lastTurn = mine.catch(() => undefined);
    return mine;
  }
}
