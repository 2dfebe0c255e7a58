import type { AppDependencies } from './app.js';
import { deleteExpiredLinks } from './auth/person-links.js';
import { deleteExpiredSessions } from './auth/session-store.js';
import { deleteOldLive } from './features/live/live-store.js';
import { deleteOldKeys } from './idempotency.js';

const HOUR_MS = 3_600_000;
const MINUTE_MS = 60_000;
/** A session that has ended is kept a month longer, for whoever asks who was signed in when. */
const ENDED_SESSIONS_KEPT_MS = 30 * 24 * HOUR_MS;

type Dependencies = Pick<AppDependencies, 'db' | 'clock' | 'log'>;

/** Throws away what has had its time: idempotency keys after 90 days, sessions a month after their end, one-time links that have run out. */
export async function tidyUp({ db, clock }: Dependencies): Promise<void> {
  const now = clock();
  await deleteOldKeys(db, now);
  await deleteExpiredLinks(db, now);
  await deleteExpiredSessions(db, new Date(now.getTime() - ENDED_SESSIONS_KEPT_MS));
}

/** At the start and every hour, what benches told every minute: it is much. The answer stops it. */
export function keepTidy(deps: Dependencies): () => void {
  const tidy = (): void => {
    tidyUp(deps).catch((error: unknown) => {
      deps.log.error({ err: error }, 'old idempotency keys and sessions could not be deleted; tried again in an hour');
    });
  };
  tidy();
  const timer = setInterval(tidy, HOUR_MS);
  timer.unref();
  const liveTimer = setInterval(() => {
    // Looked at again in a minute; whether the database answers is said by others.
    deleteOldLive(deps.db).catch(() => undefined);
  }, MINUTE_MS);
  liveTimer.unref();
  return () => {
    clearInterval(timer);
    clearInterval(liveTimer);
  };
}
