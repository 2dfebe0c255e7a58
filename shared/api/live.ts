import { z } from 'zod';
import { personRefSchema } from '../history/events.js';
import { faceSchema } from '../lamps/face.js';
import { lampColourSchema } from '../sheet/schema.js';
import { verdictSchema } from '../verdict.js';

/** What a bench tells of its work while it goes on. It is shown, never stored as evidence: the bench log and the capture file are that. */

/** Longer texts are cut by the bench before they are sent: a live page shows a line. */
export const LIVE_TEXT_LENGTH = 300;
/** The most messages in one request, and the most rows of lamp levels in one message: two seconds' worth. */
export const LIVE_MESSAGES_AT_MOST = 50;
export const LIVE_ROWS_AT_MOST = 40;
/** A script has no more steps than this (the bench log's own limit), a panel no more lamps. */
const STEPS_AT_MOST = 500;
const LAMPS_AT_MOST = 32;

const text = z.string().max(LIVE_TEXT_LENGTH);
const name = z.string().max(100);
const at = z.iso.datetime();
const index = z.number().int().min(0).max(STEPS_AT_MOST);
const milliseconds = z.number().int().min(0).max(2_000_000_000);

export const liveStepSchema = z.strictObject({ id: name, kind: name, title: text });
export type LiveStep = z.infer<typeof liveStepSchema>;

/** A lamp as a lane shows it. */
export const liveLampSchema = z.strictObject({ id: name, label: name, colour: lampColourSchema, weight: z.number().optional() });
export type LiveLamp = z.infer<typeof liveLampSchema>;

/** One message. Times `at` are the bench's own clock; milliseconds count from the beginning of the capture. */
export const liveMessageSchema = z.discriminatedUnion('kind', [
  /** Work began, or goes on after an interruption: then the steps that were done before are told again. */
  z.strictObject({
    kind: z.literal('began'),
    at,
    what: z.enum(['run', 'capture', 'measure']),
    title: text,
    machine: text,
    steps: z.array(liveStepSchema).max(STEPS_AT_MOST),
    rig: z.strictObject({ name, simulated: z.boolean() }),
  }),
  z.strictObject({ kind: z.literal('step began'), at, index }),
  /** `told`: what it came to, in words, such as a reading with its limits. No verdict: the step judges nothing. */
  z.strictObject({ kind: z.literal('step ended'), at, index, verdict: verdictSchema.optional(), told: text }),
  z.strictObject({
    kind: z.literal('capture began'),
    at,
    captureId: z.uuid(),
    lamps: z.array(liveLampSchema).max(LAMPS_AT_MOST),
    /** How long it is to be; absent: until it is stopped. */
    seconds: z.number().positive().max(100_000).optional(),
    /** Tapped in: a level holds until the next, and no decoder knows better. */
    byKeys: z.boolean(),
  }),
  /** Levels in percent of full scale, thinned to a row each twentieth of a second and one where a lamp goes on or off: `[ms, level, level, …]`, one level a lamp. */
  z.strictObject({
    kind: z.literal('lamps'),
    rows: z
      .array(
        z
          .array(z.number().int().min(0).max(2_000_000_000))
          .min(1)
          .max(LAMPS_AT_MOST + 1),
      )
      .min(1)
      .max(LIVE_ROWS_AT_MOST),
  }),
  /** The technician brought up the next code. */
  z.strictObject({ kind: z.literal('mark'), atMs: milliseconds }),
  /** What the decoder makes of the capture so far; `thresholds`: from which percentage a lamp counts as lit, where that is known. */
  z.strictObject({
    kind: z.literal('code so far'),
    shows: z.enum(['nothing', 'ready', 'code', 'dark', 'unreadable']),
    code: name.optional(),
    title: text.optional(),
    repeats: z.number().int().min(0).optional(),
    confidence: z.number().min(0).max(1).optional(),
    reason: text.optional(),
    face: faceSchema.optional(),
    thresholds: z.array(z.number().min(0).max(100).nullable()).max(LAMPS_AT_MOST),
  }),
  z.strictObject({
    kind: z.literal('capture ended'),
    at,
    how: z.enum(['done', 'stopped', 'left', 'interrupted', 'failed']),
  }),
  /** The bench is still there: nothing else was to be told for a while. */
  z.strictObject({ kind: z.literal('still here') }),
  z.strictObject({
    kind: z.literal('ended'),
    at,
    how: z.enum(['ended', 'parked', 'stopped', 'failed']),
    verdict: verdictSchema.optional(),
  }),
]);
export type LiveMessage = z.infer<typeof liveMessageSchema>;
export type LiveMessageOf<K extends LiveMessage['kind']> = Extract<LiveMessage, { kind: K }>;

/**
 * What passes and needs not be shown to who comes later: levels of the lamps, and that the bench is still there.
 *
 * @example isPassing({ kind: 'still here' }) // true
 */
export const isPassing = (message: LiveMessage): boolean => message.kind === 'lamps' || message.kind === 'still here';

/**
 * Some messages of one bench, in order. `sitting` is made anew whenever the terminal starts, `part` counts its requests from 0: a part that
 * is sent twice is shown once. `work` is the run's id, the capture's, or that of a reading.
 */
export const newLiveSchema = z.strictObject({
  sitting: z.uuid(),
  part: z.number().int().min(0).max(2_000_000_000),
  work: z.uuid(),
  unit: z.number().int().positive().max(2_000_000_000),
  messages: z.array(liveMessageSchema).min(1).max(LIVE_MESSAGES_AT_MOST),
});
export type NewLive = z.infer<typeof newLiveSchema>;

/** Whether it was shown for the first time, or had been before. */
export const liveTakenSchema = z.strictObject({ taken: z.enum(['now', 'before']) });

/** Which of it, and from where on. `after` is what the header `Last-Event-ID` says; where both are there, the header counts. */
export const liveQuerySchema = z.strictObject({
  unit: z.preprocess(
    (value) => (value === undefined ? undefined : typeof value === 'string' && /^\d+$/.test(value) ? Number(value) : NaN),
    z.number({ error: 'is the unit’s number in digits, like 412' }).int().positive().max(2_000_000_000).optional(),
  ),
  after: z.string().max(40).optional(),
});

/** What a page hears: the data of one server-sent event. */
export const liveEventSchema = z.discriminatedUnion('kind', [
  /** Forget what was shown: what follows up to `now` is the work that goes on at this moment, from its beginning. */
  z.strictObject({ kind: z.literal('start') }),
  /** Everything up to here has been told; from here on it is live. */
  z.strictObject({ kind: z.literal('now') }),
  z.strictObject({
    kind: z.literal('work'),
    /** When the server heard it. */
    at,
    work: z.uuid(),
    unit: z.number().int(),
    by: personRefSchema,
    /** The shared bench that it came from. */
    bench: z.string().optional(),
    messages: z.array(liveMessageSchema),
  }),
  /** Something was written on the unit's books: whoever shows it fetches it again. */
  z.strictObject({ kind: z.literal('unit changed'), unit: z.number().int() }),
]);
export type LiveEvent = z.infer<typeof liveEventSchema>;
export type LiveWorkEvent = Extract<LiveEvent, { kind: 'work' }>;

/**
 * The name of the event that comes every few seconds with no data of its own. A comment would do for proxies, but a page can't see
 * comments, and would take a connection that silently broke (a tablet that left the wireless) for one on which nothing happens.
 */
export const LIVE_BEAT = 'beat';
export const LIVE_BEAT_SECONDS = 15;
