import type { Response } from 'express';
import { LIVE_BEAT, LIVE_BEAT_SECONDS, type LiveEvent } from '../../../shared/api/live.js';
import type { Db } from '../../db.js';
import type { LiveHub, LiveListener } from './live-hub.js';
import { canResumeAfter, liveAfter, liveWork, newestLiveId, type PlacedLive } from './live-store.js';

/** How soon a browser comes back by itself. */
const RETRY_MS = 1_000;
/** A row may be as large as a request. */
const ROWS_AT_ONCE = 100;
/** A page that does not keep up is cut off before it fills the server's memory; it comes back and resumes. */
const UNSENT_BYTES_AT_MOST = 1_000_000;

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
  /** What the page has heard, perhaps from another server, which may be ahead of this one. */
  let heardBefore = 0;
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
    // Before it and not after: one large event alone is no reason, or the page would come back to it again and again.
    if (response.writableLength > UNSENT_BYTES_AT_MOST) cutOff();
    else response.write(text);
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
      // Until it has caught up, it reads by itself what comes.
      if (caughtUp && placed.id > heardBefore && concerns(placed)) write(eventText(placed.event, placed.id));
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
    await hub.join(listener);
    if (over) {
      hub.leave(listener);
      return;
    }
    const resumeAfter = await resumable(db, after);
    // By the table: the hub may not have heard yet of what was told a moment ago.
    const upTo = resumeAfter ?? (await newestLiveId(db));
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
    heardBefore = upTo;
    if (resumeAfter === undefined) {
      write(eventText({ kind: 'start' }));
      // Without ids: a page that is cut off in the middle of it starts anew.
      for (const { event } of await liveWork(db, upTo, unit)) {
        write(eventText(event));
        await drained(response);
      }
    }
    while (!over && heardBefore < hub.newest) {
      const handedOn = hub.newest;
      const next = await liveAfter(db, heardBefore, ROWS_AT_ONCE);
      for (const placed of next.events) {
        if (concerns(placed)) write(eventText(placed.event, placed.id));
        await drained(response);
      }
      heardBefore = next.more ? next.upTo : Math.max(next.upTo, handedOn);
    }
    write(eventText({ kind: 'now' }, heardBefore));
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

/** Waits until a page has read what was written, as long as it is there. */
async function drained(response: Response): Promise<void> {
  if (!response.writableNeedDrain || response.destroyed) return;
  await new Promise<void>((resolve) => {
    const done = (): void => {
      response.off('drain', done).off('close', done);
      resolve();
    };
    response.on('drain', done).on('close', done);
  });
}

async function resumable(db: Db, after: string | undefined): Promise<number | undefined> {
  const id = after !== undefined && /^\d{1,15}$/.test(after) ? Number(after) : undefined;
  return id !== undefined && (await canResumeAfter(db, id)) ? id : undefined;
}
