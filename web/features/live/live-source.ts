import { LIVE_BEAT, LIVE_BEAT_SECONDS, liveEventSchema } from '../../../shared/api/live.js';
import { routeUrl } from '../../../shared/api/routes.js';
import { afterEvent, withoutOld, type LiveWorks } from './live-state.js';

/** Two beats and a half: then the connection is broken, whatever the browser thinks. */
const SILENT_AFTER_MS = LIVE_BEAT_SECONDS * 2.5 * 1000;
const REOPEN = { firstMs: 500, mostMs: 10_000 };
/** A page that nobody sees gives its connection back: a browser has few for one server, and other tabs need them. */
const CLOSE_WHEN_HIDDEN_MS = 10_000;

export interface LiveView {
  works: LiveWorks;
  /** Everything is heard as it happens. */
  up: boolean;
}

export interface LiveSourceHooks {
  /** Something was written on this unit's books; undefined: perhaps on any. */
  changed: (unit: number | undefined) => void;
  /** The server does not let this page listen: somebody may have been signed out. */
  refused: () => void;
}

/**
 * Hears what goes on at the benches. The browser comes back by itself after a lost connection and says what it heard last; where it gives
 * up (a proxy that answers with an error, a connection that broke without a word), a new stream goes on at the same place.
 */
export class LiveSource {
  readonly #unit: number | undefined;
  readonly #hooks: LiveSourceHooks;
  readonly #listeners = new Set<() => void>();
  #view: LiveView = { works: new Map(), up: false };
  /** What is told up to `now`: shown then, all at once. */
  #gathered: LiveWorks | undefined;
  #stream: EventSource | undefined;
  #lastId = '';
  #reopenMs = REOPEN.firstMs;
  #watchdog: ReturnType<typeof setTimeout> | undefined;
  #reopening: ReturnType<typeof setTimeout> | undefined;
  #hiding: ReturnType<typeof setTimeout> | undefined;

  constructor(unit: number | undefined, hooks: LiveSourceHooks) {
    this.#unit = unit;
    this.#hooks = hooks;
  }

  get view(): LiveView {
    return this.#view;
  }

  subscribe(listener: () => void): () => void {
    this.#listeners.add(listener);
    return () => this.#listeners.delete(listener);
  }

  /** Connects anew at once: somebody does not want to wait for the next try. */
  retry(): void {
    this.#reopenMs = REOPEN.firstMs;
    this.#open();
  }

  start(): void {
    document.addEventListener('visibilitychange', this.#onVisibility);
    this.#open();
  }

  stop(): void {
    document.removeEventListener('visibilitychange', this.#onVisibility);
    clearTimeout(this.#hiding);
    this.#close();
  }

  #open(): void {
    this.#close();
    const after = this.#lastId === '' ? {} : { after: this.#lastId };
    const stream = new EventSource(
      routeUrl('hearLive', { query: { ...after, ...(this.#unit === undefined ? {} : { unit: this.#unit }) } }),
    );
    this.#stream = stream;
    this.#gathered = undefined;
    this.#show({ ...this.#view, up: false });
    stream.addEventListener('message', (message: MessageEvent<string>) => this.#hear(message));
    stream.addEventListener(LIVE_BEAT, (message: MessageEvent<string>) => this.#alive(message));
    stream.addEventListener('error', () => {
      if (this.#stream !== stream) return;
      this.#gathered = undefined;
      this.#show({ ...this.#view, up: false });
      if (stream.readyState === EventSource.CLOSED) {
        this.#hooks.refused();
        this.#reopenLater();
      }
    });
    this.#watch();
  }

  #close(): void {
    this.#stream?.close();
    this.#stream = undefined;
    clearTimeout(this.#watchdog);
    clearTimeout(this.#reopening);
  }

  #reopenLater(): void {
    this.#close();
    this.#reopening = setTimeout(() => this.#open(), this.#reopenMs);
    this.#reopenMs = Math.min(REOPEN.mostMs, this.#reopenMs * 2);
  }

  #watch(): void {
    clearTimeout(this.#watchdog);
    this.#watchdog = setTimeout(() => {
      this.#show({ ...this.#view, up: false });
      this.#reopenLater();
    }, SILENT_AFTER_MS);
  }

  #alive(message: MessageEvent<string>): void {
    if (message.lastEventId !== '') this.#lastId = message.lastEventId;
    this.#reopenMs = REOPEN.firstMs;
    this.#watch();
    // The beat comes every few seconds: what has grown old is let go.
    this.#show({ ...this.#view, works: withoutOld(this.#view.works, Date.now()) });
  }

  #hear(message: MessageEvent<string>): void {
    this.#alive(message);
    const parsed = liveEventSchema.safeParse(JSON.parse(message.data));
    // Of a newer server than this page: what it knows it goes on showing.
    if (!parsed.success) return;
    const event = parsed.data;
    if (event.kind === 'start') this.#hooks.changed(undefined);
    if (event.kind === 'unit changed') this.#hooks.changed(event.unit);
    const works = afterEvent(this.#gathered ?? this.#view.works, event, Date.now());
    if (event.kind === 'now') {
      this.#gathered = undefined;
      this.#show({ works, up: true });
    } else if (this.#view.up) this.#show({ ...this.#view, works });
    else this.#gathered = works;
  }

  #show(view: LiveView): void {
    if (view.up === this.#view.up && view.works === this.#view.works) return;
    this.#view = view;
    for (const listener of this.#listeners) listener();
  }

  readonly #onVisibility = (): void => {
    clearTimeout(this.#hiding);
    if (document.visibilityState === 'hidden') {
      this.#hiding = setTimeout(() => {
        this.#close();
        this.#show({ ...this.#view, up: false });
      }, CLOSE_WHEN_HIDDEN_MS);
    } else if (this.#stream === undefined) this.#open();
  };
}
