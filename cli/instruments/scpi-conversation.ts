import { parseScpiError, type ScpiError } from '../../shared/measure/scpi-error.js';
import { parseIdentification, type Identification } from '../../shared/measure/scpi-identification.js';
import {
  HalfAnswerError,
  InstrumentRefusalError,
  InstrumentTimeoutError,
  NoLinesError,
  TwoAnswersError,
  type InstrumentError,
} from './instrument-error.js';
import type { Transport } from './transport.js';

/** Long enough for a slow instrument to say who it is. */
export const USUAL_TIMEOUT_MS = 2000;
/** An error queue is emptied with that many questions at most; queues hold 20 or 30. */
const LONGEST_ERROR_QUEUE = 50;
const ERROR_QUERY = 'SYSTem:ERRor?';
/** So often a question is put when two different answers come to it. */
const MOST_ASKINGS = 3;

/** Stray lines that are remembered for a message; more are only counted. */
const MOST_STRAYS = 8;
/** A plug going in makes a NUL or two; more bytes that are no line say that something is wrong. */
const MOST_NULS_BESIDE = 4;

/** An entry of the error queue is never the answer to another question; one may still come late. */
const isNoErrorEntry = (line: string): boolean => parseScpiError(line) === undefined;

/** Half a line that stood in the port stands before the entry that follows it: it ends as one, but its number may be wrong. */
const endsAsErrorEntry = (line: string): boolean => /,\s*"(?:[^"]|"")*"\s*$/.test(line);

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
 * question the error queue is read: an instrument answers in order, the queue's entries look like nothing else, and what stands
 * before them is stale. `askSurely` reads the queue behind the answer too: what an instrument says late, or twice, then stands
 * beside the answer, and two different answers are none.
 */
export class ScpiConversation {
  /** Lines that came when nothing was asked, or were stale. */
  unasked = 0;
  readonly #transport: Transport;
  readonly #timeoutMs: number;
  #waiter: Waiter | undefined;
  #lastTurn: Promise<unknown> = Promise.resolve();
  #outOfStep = true;
  /** Lines that came since the last question and were not its answer. */
  #strays: string[] = [];

  constructor(transport: Transport, options: ConversationOptions = {}) {
    this.#transport = transport;
    this.#timeoutMs = options.timeoutMs ?? USUAL_TIMEOUT_MS;
    transport.onLine((line) => {
      if (options.passOver?.(line) === true) return;
      const waiter = this.#waiter;
      if (waiter?.accepts(line) !== true) return this.#stray(line);
      // One line for one waiter: a second one in the same chunk is a stray.
      this.#waiter = undefined;
      waiter.resolve(line);
    });
    transport.onClose((reason) => this.#waiter?.reject(reason));
  }

  /** Sends a query and gives back the line it is answered with. */
  ask(query: string, options: { timeoutMs?: number | undefined } = {}): Promise<string> {
    return this.#inTurn(async () => {
      if (this.#outOfStep) await this.#readErrors();
      return this.#exchange(query, isNoErrorEntry, options.timeoutMs ?? this.#timeoutMs);
    });
  }

  /**
   * Sends a query whose answer becomes a record, and makes sure that it is the answer to this one. After two different answers it asks
   * again, unless `once`; after MOST_ASKINGS it refuses with a TwoAnswersError. An error that the question left in the queue is a refusal, whatever was answered.
   */
  askSurely(query: string, options: { timeoutMs?: number | undefined; once?: boolean } = {}): Promise<string> {
    return this.#inTurn(async () => {
      for (let asking = 1; ; asking += 1) {
        if (this.#outOfStep) await this.#readErrors();
        this.#strays = [];
        const answer = await this.#exchange(query, isNoErrorEntry, options.timeoutMs ?? this.#timeoutMs);
        const [refusal] = await this.#readErrors();
        const answers = [answer, ...this.#strays];
        if (answers.every((one) => one === answer)) {
          if (refusal !== undefined) throw new InstrumentRefusalError(this.#transport, query, refusal, answer);
          return answer;
        }
        this.#outOfStep = true;
        if (options.once === true || asking === MOST_ASKINGS) throw new TwoAnswersError(this.#transport, query, answers);
      }
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
    const droppedBefore = this.#transport.droppedBytes();
    let again = true;
    while (errors.length < LONGEST_ERROR_QUEUE) {
      let line: string;
      try {
        line = await this.#exchange(ERROR_QUERY, endsAsErrorEntry, this.#timeoutMs);
      } catch (error) {
        // An endless line that stood in the port has swallowed this answer.
        if (!again || this.#transport.droppedBytes() === droppedBefore) throw error;
        again = false;
        continue;
      }
      const entry = parseScpiError(line);
      if (entry === undefined && again) {
        again = false;
        continue;
      }
      if (entry === undefined || entry.number === 0) break;
      errors.push(entry);
    }
    this.#outOfStep = false;
    return errors;
  }

  #stray(line: string): void {
    this.unasked += 1;
    // What comes unasked may be the beginning of more: the next question first falls into step again.
    if (this.#waiter === undefined) this.#outOfStep = true;
    if (this.#strays.length < MOST_STRAYS) this.#strays.push(line);
  }

  async #exchange(query: string, accepts: (line: string) => boolean, timeoutMs: number): Promise<string> {
    let timer: NodeJS.Timeout | undefined;
    const droppedBefore = this.#transport.droppedBytes();
    try {
      return await new Promise<string>((resolve, reject) => {
        this.#waiter = { accepts, resolve, reject };
        timer = setTimeout(() => reject(this.#silence(query, timeoutMs, droppedBefore)), timeoutMs);
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

  /** Why no answer came: nothing at all, half a line, or bytes that are no line. */
  #silence(query: string, timeoutMs: number, droppedBefore: number): InstrumentError {
    const dropped = this.#transport.droppedBytes() - droppedBefore;
    if (dropped >= MOST_NULS_BESIDE) return new NoLinesError(this.#transport, query, dropped);
    const half = this.#transport.unfinished();
    if (half.replaceAll('\0', '') !== '') return new HalfAnswerError(this.#transport, query, half, timeoutMs);
    if (half !== '') return new NoLinesError(this.#transport, query, half.length);
    return new InstrumentTimeoutError(this.#transport, query, timeoutMs);
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
