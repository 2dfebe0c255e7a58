import pg from 'pg';
import type { Logger } from 'pino';
import type { Db } from '../../db.js';
import { idsWentBack, LIVE_CHANNEL, liveAfter, newestLiveId, SIGN_OUTS_CHANNEL, type PlacedLive } from './live-store.js';

/** One open page. */
export interface LiveListener {
  heard(placed: PlacedLive): void;
  /** Somebody was signed out: is it this one? */
  checkSignIn(): void;
  /** The server stops. */
  end(): void;
}

export interface LiveHubParts {
  db: Db;
  /** Of the same database: notifications need a connection of their own. */
  databaseUrl: string;
  log: Logger;
}

/** A row may be as large as a request. */
const ROWS_AT_ONCE = 100;
const RECONNECT = { firstMs: 100, mostMs: 5_000 };
/** A connection that broke without a word is found by asking; what it should have told is then looked up. */
const LOOK_ANYWAY_MS = 10_000;
const ANSWERS_WITHIN_MS = 5_000;

/**
 * Hears by PostgreSQL's LISTEN that something was told, whichever server it was told to, reads it from the table and hands it to the pages
 * that are open here. A notification only wakes: what counts is the table, so after a lost connection nothing is missing.
 * It connects when the first page opens.
 */
export class LiveHub {
  readonly #parts: LiveHubParts;
  readonly #listeners = new Set<LiveListener>();
  #connection: pg.Client | undefined;
  #started: Promise<void> | undefined;
  #closed = false;
  #retryMs = RECONNECT.firstMs;
  #timers = new Set<NodeJS.Timeout>();
  /** Everything up to here was handed on. */
  #newest = 0;
  /** Until then nobody knows from where to look. */
  #begun = false;
  #looking = false;
  #lookAgain = false;

  constructor(parts: LiveHubParts) {
    this.#parts = parts;
  }

  /** The page hears everything that is told from now on. Fails where the database does not answer. */
  async join(listener: LiveListener): Promise<void> {
    this.#started ??= this.#start();
    try {
      await this.#started;
    } catch (error) {
      this.#started = undefined;
      throw error;
    }
    this.#listeners.add(listener);
    if (this.#closed) listener.end();
  }

  leave(listener: LiveListener): void {
    this.#listeners.delete(listener);
  }

  /** Everything up to this id was handed to every listener. */
  get newest(): number {
    return this.#newest;
  }

  /** Ends every page's stream; none may hold up the end of the server. */
  async close(): Promise<void> {
    this.#closed = true;
    for (const timer of this.#timers) clearTimeout(timer);
    for (const listener of this.#listeners) listener.end();
    this.#listeners.clear();
    await this.#hangUp();
  }

  async #hangUp(): Promise<void> {
    const connection = this.#connection;
    // First: its end is then no loss.
    this.#connection = undefined;
    await connection?.end().catch(() => undefined);
  }

  async #start(): Promise<void> {
    await this.#connect();
    try {
      this.#newest = await newestLiveId(this.#parts.db);
      this.#begun = true;
    } catch (error) {
      await this.#hangUp();
      throw error;
    }
    // What was told between listening and knowing from where.
    this.#look();
    this.#lookNowAndThen();
  }

  async #connect(): Promise<void> {
    const connection = new pg.Client({
      connectionString: this.#parts.databaseUrl,
      application_name: 'refettle live',
      keepAlive: true,
      connectionTimeoutMillis: ANSWERS_WITHIN_MS,
    });
    connection.on('error', () => this.#lost(connection));
    connection.on('end', () => this.#lost(connection));
    connection.on('notification', ({ channel }) => {
      if (channel === LIVE_CHANNEL) this.#look();
      else for (const listener of [...this.#listeners]) listener.checkSignIn();
    });
    try {
      await connection.connect();
      await connection.query(`listen ${LIVE_CHANNEL}; listen ${SIGN_OUTS_CHANNEL}`);
    } catch (error) {
      await connection.end().catch(() => undefined);
      throw error;
    }
    if (this.#closed) {
      await connection.end().catch(() => undefined);
      return;
    }
    this.#connection = connection;
    this.#retryMs = RECONNECT.firstMs;
  }

  /** Told twice at the least (error, end); the first one counts. */
  #lost(connection: pg.Client): void {
    if (this.#connection !== connection) return;
    void this.#hangUp();
    this.#reconnectLater();
  }

  #reconnectLater(): void {
    if (this.#closed) return;
    this.#later(this.#retryMs, () => {
      this.#connect().then(
        () => {
          // What was told and who was signed out while nobody listened.
          this.#look();
          for (const listener of [...this.#listeners]) listener.checkSignIn();
        },
        () => this.#reconnectLater(),
      );
    });
    this.#retryMs = Math.min(RECONNECT.mostMs, this.#retryMs * 2);
  }

  #lookNowAndThen(): void {
    this.#later(LOOK_ANYWAY_MS, () => {
      this.#lookNowAndThen();
      this.#look();
      const connection = this.#connection;
      if (!connection) return;
      const silent = this.#later(ANSWERS_WITHIN_MS, () => this.#lost(connection));
      connection.query('select 1').then(
        () => this.#forget(silent),
        () => this.#forget(silent),
      );
    });
  }

  #look(): void {
    if (!this.#begun) return;
    if (this.#looking) {
      this.#lookAgain = true;
      return;
    }
    this.#looking = true;
    this.#handOn()
      .catch((error: unknown) => {
        // The next notification, reconnection or look finds it all in the table.
        this.#parts.log.warn({ err: error }, 'what benches tell could not be read; tried again in seconds');
      })
      .finally(() => {
        this.#looking = false;
      });
  }

  async #handOn(): Promise<void> {
    const { db } = this.#parts;
    do {
      this.#lookAgain = false;
      const { events, upTo, more } = await liveAfter(db, this.#newest, ROWS_AT_ONCE);
      if (upTo === this.#newest && (await idsWentBack(db, this.#newest))) {
        await this.#beginAnew();
        continue;
      }
      for (const placed of events) {
        this.#newest = placed.id;
        for (const listener of [...this.#listeners]) listener.heard(placed);
      }
      this.#newest = upTo;
      if (more) this.#lookAgain = true;
    } while (this.#lookAgain && !this.#closed);
  }

  /** What the pages have heard is no longer in the table, and its ids are given again: they come back and begin anew. */
  async #beginAnew(): Promise<void> {
    this.#newest = await newestLiveId(this.#parts.db);
    for (const listener of [...this.#listeners]) listener.end();
  }

  #later(milliseconds: number, work: () => void): NodeJS.Timeout {
    const timer = setTimeout(() => {
      this.#timers.delete(timer);
      if (!this.#closed) work();
    }, milliseconds);
    timer.unref();
    this.#timers.add(timer);
    return timer;
  }

  #forget(timer: NodeJS.Timeout): void {
    clearTimeout(timer);
    this.#timers.delete(timer);
  }
}
