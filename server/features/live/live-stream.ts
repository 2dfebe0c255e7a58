import { once } from 'node:events';
import type { Response } from 'express';
import { LIVE_BEAT, LIVE_BEAT_SECONDS, type LiveEvent } from '../../../shared/api/live.js';
import type { Db } from '../../db.js';
import type { LiveHub, LiveListener } from './live-hub.js';
import { canResumeAfter, liveAfter, liveWork, type PlacedLive } from './live-store.js';

/** How soon a browser comes back by itself. */
const RETRY_MS = 1_000;
const ROWS_AT_ONCE = 500;
/** A page that does not keep up is cut off before it fills the server's memory; it comes back and resumes. */
const UNSENT_BYTES_AT_MOST = 1_000_000;
const WAITING_ROWS_AT_MOST = 20_000;

export interface StreamParts {
  hub: LiveHub;
  db: Db;
  response: Response;
  /** Undefined: every unit. */
  unit: number | undefined;
  /** What the page heard last, as it says. */
  after: string | undefined;
  stillAllowed: () => Promise<boolean>;
}

const eventText = (event: LiveEvent, id?: number): string =>
  `${id === undefined ? '' : `id: ${String(id)}\n`}data: ${JSON.stringify(event)}\n\n`;

/** WHATWG HTML, section 9.2: server-sent events. Resolves when the stream has begun; it goes on until the page leaves or the server ends it. */
export async function openStream({ hub, db, response, unit, after, stillAllowed }: StreamParts): Promise<void> {
  let over = false;
  let caughtUp = false;
  /** What the page has heard from another server, which may be ahead of this one. */
  let heardBefore = 0;
  const waiting: PlacedLive[] = [];
  const concerns = ({ event }: PlacedLive): boolean => unit === undefined || ('unit' in event && event.unit === unit);

  const end = (): void => {
    if (over) return;
    over = true;
    clearInterval(beat);
    hub.leave(listener);
    if (response.headersSent) response.end();
  };
  const cutOff = (): void => {
    end();
    response.destroy();
  };
  const write = (text: string): void => {
    if (over) return;
    response.write(text);
    if (response.writableLength > UNSENT_BYTES_AT_MOST) cutOff();
  };
  const checkSignIn = (): void => {
    stillAllowed().then(
      (allowed) => {
        if (!allowed) end();
      },
      // The database is away: nobody was signed out meanwhile.
      () => undefined,
    );
  };
  const listener: LiveListener = {
    heard(placed) {
      if (placed.id <= heardBefore || !concerns(placed)) return;
      if (caughtUp) write(eventText(placed.event, placed.id));
      else if (waiting.push(placed) > WAITING_ROWS_AT_MOST) cutOff();
    },
    checkSignIn,
    end,
  };
  const beat = setInterval(() => {
    // It carries the newest id, so that a page which hears of one quiet unit can resume, too.
    if (caughtUp) write(`id: ${String(Math.max(hub.newest, heardBefore))}\nevent: ${LIVE_BEAT}\ndata:\n\n`);
    checkSignIn();
  }, LIVE_BEAT_SECONDS * 1000);
  beat.unref();
  response.on('close', end);
  // A page that left while its sign-in was looked at was told of before anybody listened here.
  if (response.closed) {
    end();
    return;
  }

  try {
    const upTo = await hub.join(listener);
    if (over) {
      hub.leave(listener);
      return;
    }
    const resumeAfter = await resumable(db, after);
    heardBefore = resumeAfter ?? 0;
    if (over) return;
    response.status(200).set({
      'Content-Type': 'text/event-stream; charset=utf-8',
      // Proxies that gather answers before they pass them on are told not to.
      'X-Accel-Buffering': 'no',
      'Cache-Control': 'no-store, no-transform',
      // Kept open behind a stream that has ended, it would hold up the server's end.
      Connection: 'close',
    });
    response.write(`retry: ${String(RETRY_MS)}\n\n`);
    const pause = async (): Promise<void> => {
      if (!over && response.writableNeedDrain) await Promise.race([once(response, 'drain'), once(response, 'close')]);
    };
    if (resumeAfter === undefined) {
      write(eventText({ kind: 'start' }));
      // Without ids: a page that is cut off in the middle of it starts anew.
      for (const { event } of await liveWork(db, upTo, unit)) {
        write(eventText(event));
        await pause();
      }
    } else {
      let from = resumeAfter;
      for (let rows = await liveAfter(db, from, { upTo, limit: ROWS_AT_ONCE }); rows.length > 0 && !over;) {
        for (const row of rows) if (concerns(row)) write(eventText(row.event, row.id));
        await pause();
        from = rows.at(-1)?.id ?? upTo;
        rows = await liveAfter(db, from, { upTo, limit: ROWS_AT_ONCE });
      }
    }
    write(eventText({ kind: 'now' }, Math.max(upTo, heardBefore)));
    for (const placed of waiting.splice(0)) if (placed.id > heardBefore) write(eventText(placed.event, placed.id));
    caughtUp = true;
  } catch (error) {
    // Where the answer has begun, the page is cut off and comes back; otherwise it gets a problem like any other request.
    if (response.headersSent) {
      cutOff();
      return;
    }
    over = true;
    clearInterval(beat);
    hub.leave(listener);
    throw error;
  }
}

async function resumable(db: Db, after: string | undefined): Promise<number | undefined> {
  const id = after !== undefined && /^\d{1,15}$/.test(after) ? Number(after) : undefined;
  return id !== undefined && (await canResumeAfter(db, id)) ? id : undefined;
}
