import { LIVE_MESSAGES_AT_MOST, type LiveMessage, type LiveMessageOf, type NewLive } from '../../shared/api/live.js';
import type { Api } from '../api/api-client.js';
import { ApiProblemError, NotSignedInError, ServerError, StoppedError } from '../errors.js';
import { fewerRows } from './lamp-thinner.js';

/**
 * What somebody waits to see (a lamp that goes on, a step) goes at once, unless a part went a moment ago; lanes in between are drawn four
 * times a second and wait for company. Fewer parts in all than ten a second without a difference, and each comes sooner.
 */
const PART_EVERY_MS = 50;
const LANES_EVERY_MS = 200;
/** One that is not answered by then is sent again. */
const PART_TIMEOUT_MS = 5_000;
const RETRY = { firstMs: 500, mostMs: 10_000 };
/** What these answers refuse is in the messages, not who sends them: malformed, too large, not usable. */
const ABOUT_CONTENT: readonly number[] = [400, 413, 422];
/** Where nothing is to be told, a sign of life. */
const STILL_HERE_EVERY_MS = 15_000;
/** What waits while the network is away: a whole run without its lamps. */
const WAITING_AT_MOST = 1_500;
/** At the end of the work it is waited so long until the last is told: where the network is slow, pages learn it from the books. */
const LAST_WORD_WITHIN_MS = 1_000;

export interface LiveRelayParts {
  /** For who does the work. */
  api: (as: { id: string } | undefined) => Promise<Pick<Api, 'call'>>;
  newId: () => string;
  /** A line for people. */
  say: (line: string) => void;
}

/**
 * Tells the server what goes on at this bench, for those who watch. Never in the way: nothing waits for it, nothing fails by it, its
 * memory is bounded, and where the network is slow the lamps are dropped first. One request is in flight at most; a part that may have
 * arrived is sent again as it was, and the server shows it once.
 */
export class LiveRelay {
  readonly #parts: LiveRelayParts;
  readonly #sitting: string;
  #work: { id: string; unit: number; by: { id: string } | undefined } | undefined;
  #waiting: LiveMessage[] = [];
  /** Made up, and not yet known to have arrived. */
  #part: NewLive | undefined;
  #count = 0;
  #timer: NodeJS.Timeout | undefined;
  #signOfLife: NodeJS.Timeout | undefined;
  #sending = false;
  /** Something that waits is to be seen at once. */
  #urgent = false;
  #sentAtMs = -Infinity;
  #retryMs = RETRY.firstMs;
  #failing = false;
  #off: string | undefined;
  #saidOff = false;
  #recording = false;
  #onIdle = (): void => undefined;
  #ending: Promise<void> | undefined;
  /** So many parts hold one message each: one of them is not good, and the server did not say which. */
  #oneByOne = 0;

  constructor(parts: LiveRelayParts) {
    this.#parts = parts;
    this.#sitting = parts.newId();
  }

  /** Work is going on that somebody may watch. */
  get on(): boolean {
    return this.#work !== undefined && this.#off === undefined;
  }

  begin(work: { id: string; unit: number; by?: { id: string } | undefined }, began: LiveMessageOf<'began'>): void {
    // One bench does one thing at a time: what was not told of the last is of no use beside this.
    this.#waiting = [];
    this.#work = { by: undefined, ...work };
    this.tell(began);
    clearInterval(this.#signOfLife);
    this.#signOfLife = setInterval(() => {
      if (performance.now() - this.#sentAtMs > STILL_HERE_EVERY_MS / 2 && this.#waiting.length === 0) this.tell({ kind: 'still here' });
    }, STILL_HERE_EVERY_MS);
    this.#signOfLife.unref();
  }

  /** `mayWait`: nobody sees it before the lanes are drawn again. */
  tell(message: LiveMessage, { mayWait = message.kind === 'still here' }: { mayWait?: boolean } = {}): void {
    if (!this.on) return;
    const last = this.#waiting.at(-1);
    if (message.kind === 'lamps' && last?.kind === 'lamps') last.rows = fewerRows([...last.rows, ...message.rows]);
    else this.#waiting.push(message.kind === 'lamps' ? { ...message, rows: fewerRows(message.rows) } : message);
    if (this.#waiting.length > WAITING_AT_MOST) this.#makeRoom();
    if (!mayWait && !this.#urgent) {
      this.#urgent = true;
      // What was to go later goes with it.
      clearTimeout(this.#timer);
      this.#timer = undefined;
    }
    this.#sendSoon();
  }

  /** While the screen is drawn on, nothing is said beside it. */
  set recording(going: boolean) {
    this.#recording = going;
    this.#sayOff();
  }

  /** The work is over: waits a moment until the last is told, never for a network that is away. It ends once; how, the first word says. */
  async end(message: LiveMessageOf<'ended'>): Promise<void> {
    if (this.#work === undefined) return;
    this.#ending ??= this.#end(message);
    await this.#ending;
    this.#ending = undefined;
  }

  async #end(message: LiveMessageOf<'ended'>): Promise<void> {
    this.tell(message);
    clearInterval(this.#signOfLife);
    if (this.on && !this.#failing) {
      let timer: NodeJS.Timeout | undefined;
      await Promise.race([
        new Promise<void>((resolve) => {
          this.#onIdle = resolve;
          this.#sendSoon();
        }),
        new Promise<void>((resolve) => (timer = setTimeout(resolve, LAST_WORD_WITHIN_MS))),
      ]);
      clearTimeout(timer);
    }
    clearTimeout(this.#timer);
    this.#timer = undefined;
    this.#work = undefined;
    this.#waiting = [];
    this.#part = undefined;
  }

  #sendSoon(): void {
    if (this.#timer !== undefined || this.#sending || !this.on) return;
    const sinceLast = performance.now() - this.#sentAtMs;
    const everyMs = this.#urgent ? PART_EVERY_MS : LANES_EVERY_MS;
    const inMs = this.#failing ? this.#retryMs : Math.max(0, everyMs - sinceLast);
    this.#timer = setTimeout(() => {
      this.#timer = undefined;
      void this.#send();
    }, inMs);
    this.#timer.unref();
  }

  async #send(): Promise<void> {
    const work = this.#work;
    if (work === undefined) return;
    if (this.#part === undefined) {
      this.#oneByOne = Math.max(0, this.#oneByOne - 1);
      const messages = this.#waiting.splice(0, this.#oneByOne > 0 ? 1 : LIVE_MESSAGES_AT_MOST);
      if (messages.length === 0) {
        this.#onIdle();
        return;
      }
      this.#urgent = this.#waiting.length > 0;
      this.#part = { sitting: this.#sitting, part: this.#count++, work: work.id, unit: work.unit, messages };
    }
    this.#sending = true;
    this.#sentAtMs = performance.now();
    const part = this.#part;
    try {
      await (await this.#parts.api(work.by)).call('tellLive', { body: part, timeoutMs: PART_TIMEOUT_MS });
      if (this.#part === part) this.#part = undefined;
      this.#failing = false;
      this.#retryMs = RETRY.firstMs;
    } catch (error) {
      if (isPassingFault(error)) {
        if (this.#failing) this.#retryMs = Math.min(RETRY.mostMs, this.#retryMs * 2);
        this.#failing = !(error instanceof StoppedError);
        // Whoever waits for the last word waits no longer.
        this.#onIdle();
      } else if (!this.#leaveOut(part, error)) this.#turnOff(error);
    } finally {
      this.#sending = false;
    }
    if (this.#part === undefined && this.#waiting.length === 0) this.#onIdle();
    else this.#sendSoon();
  }

  /** Leaves out the message that the server can't use, and sends the others. False: it is not about one, or nothing is shown without it. */
  #leaveOut(part: NewLive, error: unknown): boolean {
    if (!(error instanceof ApiProblemError) || !ABOUT_CONTENT.includes(error.status)) return false;
    const pointers = error.errors.map(({ pointer }) => pointer);
    const named = new Set(pointers.map((pointer) => Number(/^\/messages\/(\d+)/.exec(pointer)?.[1])));
    if (pointers.some((pointer) => !pointer.startsWith('/messages/') && pointer !== '')) return false;
    const { messages } = part;
    const isNamed = messages.some((_, index) => named.has(index));
    // The server does not say which: each is then sent by itself.
    const [rest, bad] = isNamed
      ? [messages.filter((_, index) => !named.has(index)), messages.filter((_, index) => named.has(index))]
      : [messages.slice(0, 1), messages.length === 1 ? messages : []];
    if (bad.some(({ kind }) => kind === 'began')) return false;
    if (!isNamed) {
      this.#waiting.unshift(...messages.slice(1));
      this.#oneByOne += messages.length;
    }
    const left = bad === messages ? [] : rest;
    // It was refused whole, so its number is free.
    if (this.#part === part) this.#part = left.length === 0 ? undefined : { ...part, messages: left };
    return true;
  }

  /** The server refuses: it would refuse the next part, too. */
  #turnOff(error: unknown): void {
    this.#off = error instanceof Error ? error.message : String(error);
    this.#waiting = [];
    this.#part = undefined;
    clearInterval(this.#signOfLife);
    this.#sayOff();
    this.#onIdle();
  }

  #sayOff(): void {
    if (this.#off === undefined || this.#saidOff || this.#recording) return;
    this.#saidOff = true;
    this.#parts.say(`Nobody sees this live, the work itself goes on: ${this.#off}`);
  }

  /** Lamps go first, then what was made of them; after that the oldest but the beginning. */
  #makeRoom(): void {
    const without = (...kinds: LiveMessage['kind'][]): void => {
      if (this.#waiting.length > WAITING_AT_MOST) this.#waiting = this.#waiting.filter(({ kind }) => !kinds.includes(kind));
    };
    without('lamps');
    without('code so far', 'mark', 'still here');
    if (this.#waiting.length > WAITING_AT_MOST) this.#waiting.splice(1, this.#waiting.length - WAITING_AT_MOST);
  }
}

/** A network that is away, a server that is busy or restarts, a proxy that says so, Ctrl-C: it may be told later. */
const isPassingFault = (error: unknown): boolean =>
  error instanceof StoppedError ||
  (error instanceof ApiProblemError
    ? error.status >= 500 || error.status === 429
    : error instanceof ServerError && !(error instanceof NotSignedInError));
