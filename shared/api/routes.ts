import { z } from 'zod';
import { auditFilterSchema, auditQuerySchema, auditRowSchema } from './audit.js';
import {
  benchRigSchema,
  benchSchema,
  benchWithTokenSchema,
  newBenchSchema,
  ownBenchSchema,
  ownPinSchema,
  pinOfAnotherSchema,
  pinStateSchema,
  signedOnSchema,
  signOnSchema,
} from './benches.js';
import { capturePageSchema, captureStoredSchema, newCaptureSchema } from './captures.js';
import { liveEventSchema, liveQuerySchema, liveTakenSchema, newLiveSchema } from './live.js';
import { pageOf, pageQuerySchema } from './page.js';
import {
  changePasswordSchema,
  changeRoleSchema,
  deactivateSchema,
  inviteSchema,
  linkPageSchema,
  lookAtLinkSchema,
  madeLinkSchema,
  personRowSchema,
  sessionRowSchema,
  sessionsEndedSchema,
  useLinkSchema,
} from './people.js';
import { eventStoredSchema, newInspectionSchema, newReadingSchema, newRepairSchema } from './readings.js';
import type { Action } from './roles.js';
import { newRunSchema, runPageSchema, runStoredSchema } from './runs.js';
import { firstAdminSchema, meSchema, newPersonSchema, personSchema, signedInSchema, signInSchema } from './sessions.js';
import { newSheetSchema, sheetPageSchema, sheetRowSchema } from './sheets.js';
import { publicKeysSchema, publicTagQuerySchema, publicTagSchema, signOffSchema, tagPageSchema, withdrawTagSchema } from './tags.js';
import { giveFamilySchema, newUnitSchema, overrideSchema, unitPageSchema, unitRowSchema, unitSchema } from './units.js';

/** One route: the server checks requests by it, OpenAPI describes it, terminal and browser call it, the tests walk it. */
export interface Route {
  method: 'GET' | 'POST' | 'DELETE';
  /** Express's path; `:name` is a path parameter of `params`. */
  path: string;
  action: Action;
  summary: string;
  params?: z.ZodObject;
  query?: z.ZodObject;
  body?: z.ZodType;
  status: 200 | 201 | 204;
  response: z.ZodType;
  /** The answer's media type where it is no JSON: it is sent piece by piece, and `response` describes it whole. */
  media?: 'text/csv';
  /** A write that a bench sends: carries an Idempotency-Key. */
  idempotent?: true;
  /** The answer has no end: server-sent events (text/event-stream), and `response` is the data of each. */
  stream?: true;
}

/** Digits and nothing else: JavaScript's other ways to write a number (`0x1`, `1e0`, blanks around it) are slips in an address. */
const unitNumber = z.strictObject({
  number: z.preprocess(
    (text) => (/^\d+$/.test(String(text)) ? Number(text) : undefined),
    z.number({ error: 'is the unit’s number in digits, like 412' }).int().positive().max(2_000_000_000),
  ),
});
const byId = z.strictObject({ id: z.uuid() });
const sessionOfPerson = z.strictObject({ id: z.uuid(), session: z.uuid() });
const ownSession = z.strictObject({ session: z.uuid() });
const family = z.strictObject({ family: z.string().max(100) });
const tagNumber = z.strictObject({ tag: z.string().max(40) });
const nothing = z.strictObject({});

export const routes = {
  health: {
    method: 'GET',
    path: '/api/health',
    action: 'health.read',
    summary: 'Whether the database answers',
    status: 200,
    response: z.strictObject({ ok: z.literal(true) }),
  },
  signIn: {
    method: 'POST',
    path: '/api/sessions',
    action: 'session.create',
    summary: 'Sign in',
    body: signInSchema,
    status: 201,
    response: signedInSchema,
  },
  signOut: {
    method: 'DELETE',
    path: '/api/sessions/current',
    action: 'session.end',
    summary: 'Sign out: the token is revoked',
    status: 204,
    response: nothing,
  },
  createFirstAdmin: {
    method: 'POST',
    path: '/api/first-admin',
    action: 'first-admin.create',
    summary: 'Make the first admin by the one-time link that the terminal printed',
    body: firstAdminSchema,
    status: 201,
    response: personSchema,
  },
  me: { method: 'GET', path: '/api/me', action: 'me.read', summary: 'Who is signed in, and the shop', status: 200, response: meSchema },
  listPeople: {
    method: 'GET',
    path: '/api/people',
    action: 'person.read',
    summary: 'The people of the shop',
    query: pageQuerySchema,
    status: 200,
    response: pageOf(personRowSchema),
  },
  createPerson: {
    method: 'POST',
    path: '/api/people',
    action: 'person.create',
    summary: 'Add a person',
    body: newPersonSchema,
    status: 201,
    response: personSchema,
  },
  getPerson: {
    method: 'GET',
    path: '/api/people/:id',
    action: 'person.read',
    summary: 'A person of the shop',
    params: byId,
    status: 200,
    response: personRowSchema,
  },
  invitePerson: {
    method: 'POST',
    path: '/api/people/invitations',
    action: 'person.create',
    summary: 'Invite a person: the answer holds a one-time link by which they set their password',
    body: inviteSchema,
    status: 201,
    response: madeLinkSchema,
  },
  makeLink: {
    method: 'POST',
    path: '/api/people/:id/link',
    action: 'person.change',
    summary: 'A one-time link for a forgotten password or a new invitation; the link before it no longer opens',
    params: byId,
    status: 201,
    response: madeLinkSchema,
  },
  changeRole: {
    method: 'POST',
    path: '/api/people/:id/role',
    action: 'person.change',
    summary: 'Change a role; nobody changes their own, and the last active admin stays one',
    params: byId,
    body: changeRoleSchema,
    status: 200,
    response: personRowSchema,
  },
  deactivatePerson: {
    method: 'POST',
    path: '/api/people/:id/deactivation',
    action: 'person.change',
    summary: 'Somebody no longer works here: their sessions end at once, their history stays',
    params: byId,
    body: deactivateSchema,
    status: 200,
    response: personRowSchema,
  },
  activatePerson: {
    method: 'POST',
    path: '/api/people/:id/activation',
    action: 'person.change',
    summary: 'Somebody works here again',
    params: byId,
    status: 200,
    response: personRowSchema,
  },
  listSessions: {
    method: 'GET',
    path: '/api/people/:id/sessions',
    action: 'session.read',
    summary: 'The sessions of a person, newest first',
    params: byId,
    query: pageQuerySchema,
    status: 200,
    response: pageOf(sessionRowSchema),
  },
  revokeSession: {
    method: 'DELETE',
    path: '/api/people/:id/sessions/:session',
    action: 'session.revoke',
    summary: 'End a session of a person',
    params: sessionOfPerson,
    status: 204,
    response: nothing,
  },
  revokeSessions: {
    method: 'DELETE',
    path: '/api/people/:id/sessions',
    action: 'session.revoke',
    summary: 'End every session of a person',
    params: byId,
    status: 200,
    response: sessionsEndedSchema,
  },
  listOwnSessions: {
    method: 'GET',
    path: '/api/me/sessions',
    action: 'own-session.read',
    summary: 'Where I am signed in, newest first',
    query: pageQuerySchema,
    status: 200,
    response: pageOf(sessionRowSchema),
  },
  revokeOwnSession: {
    method: 'DELETE',
    path: '/api/me/sessions/:session',
    action: 'own-session.revoke',
    summary: 'End a session of my own',
    params: ownSession,
    status: 204,
    response: nothing,
  },
  revokeOtherSessions: {
    method: 'DELETE',
    path: '/api/me/sessions',
    action: 'own-session.revoke',
    summary: 'End every session of my own but this one',
    status: 200,
    response: sessionsEndedSchema,
  },
  changePassword: {
    method: 'POST',
    path: '/api/me/password',
    action: 'own-password.change',
    summary: 'Change my password; every other session of mine ends',
    body: changePasswordSchema,
    status: 200,
    response: sessionsEndedSchema,
  },
  lookAtLink: {
    method: 'POST',
    path: '/api/person-links/look',
    action: 'person-link.use',
    summary: 'Whose one-time link this is, and for what; its token goes into the body, so that it stands in no log',
    body: lookAtLinkSchema,
    status: 200,
    response: linkPageSchema,
  },
  useLink: {
    method: 'POST',
    path: '/api/person-links/use',
    action: 'person-link.use',
    summary: 'Set a password by a one-time link; every session of that person ends',
    body: useLinkSchema,
    status: 200,
    response: personSchema,
  },
  listAudit: {
    method: 'GET',
    path: '/api/audit',
    action: 'audit.read',
    summary: 'Who changed what, when, before and after; newest first',
    query: auditQuerySchema,
    status: 200,
    response: pageOf(auditRowSchema),
  },
  exportAudit: {
    method: 'GET',
    path: '/api/audit.csv',
    action: 'audit.read',
    summary: 'The same as CSV (RFC 4180), whole and oldest first',
    query: auditFilterSchema,
    status: 200,
    response: z.string(),
    media: 'text/csv',
  },
  setOwnPin: {
    method: 'POST',
    path: '/api/me/pin',
    action: 'own-pin.write',
    summary: 'Set the own PIN for shared benches; asks for the own password',
    body: ownPinSchema,
    status: 200,
    response: pinStateSchema,
  },
  getOwnPin: {
    method: 'GET',
    path: '/api/me/pin',
    action: 'own-pin.write',
    summary: 'Whether the own PIN is set, and since when',
    status: 200,
    response: pinStateSchema,
  },
  listPins: {
    method: 'GET',
    path: '/api/pins',
    action: 'pin.read',
    summary: 'Who has a PIN for shared benches',
    query: pageQuerySchema,
    status: 200,
    response: pageOf(pinStateSchema),
  },
  setPin: {
    method: 'POST',
    path: '/api/people/:id/pin',
    action: 'pin.write',
    summary: 'Set another’s PIN',
    params: byId,
    body: pinOfAnotherSchema,
    status: 200,
    response: pinStateSchema,
  },
  clearPin: {
    method: 'DELETE',
    path: '/api/people/:id/pin',
    action: 'pin.write',
    summary: 'Take a PIN away: its holder signs on nowhere until a new one is set',
    params: byId,
    status: 200,
    response: pinStateSchema,
  },
  listBenches: {
    method: 'GET',
    path: '/api/benches',
    action: 'bench.read',
    summary: 'The shared benches: when they last called, who signs on there, their rigs',
    query: pageQuerySchema,
    status: 200,
    response: pageOf(benchSchema),
  },
  createBench: {
    method: 'POST',
    path: '/api/benches',
    action: 'bench.write',
    summary: 'Make a shared bench; its token is in this answer only',
    body: newBenchSchema,
    status: 201,
    response: benchWithTokenSchema,
  },
  renewBenchToken: {
    method: 'POST',
    path: '/api/benches/:id/token',
    action: 'bench.write',
    summary: 'Give a bench a new token; the old one is no longer good',
    params: byId,
    status: 201,
    response: benchWithTokenSchema,
  },
  revokeBench: {
    method: 'POST',
    path: '/api/benches/:id/revocation',
    action: 'bench.write',
    summary: 'End a bench’s token; what it recorded stays',
    params: byId,
    status: 200,
    response: benchSchema,
  },
  ownBench: {
    method: 'GET',
    path: '/api/bench',
    action: 'bench.self',
    summary: 'A shared bench’s own view: its name, the shop, whom it offers at sign-on',
    status: 200,
    response: ownBenchSchema,
  },
  reportRig: {
    method: 'POST',
    path: '/api/bench/rig',
    action: 'bench.self',
    summary: 'A shared bench says what hangs on it',
    body: benchRigSchema,
    status: 200,
    response: ownBenchSchema,
  },
  signOnAtBench: {
    method: 'POST',
    path: '/api/bench/sign-ons',
    action: 'bench.sign-on',
    summary: 'Sign on at a shared bench by name and PIN',
    body: signOnSchema,
    status: 201,
    response: signedOnSchema,
  },
  listSheets: {
    method: 'GET',
    path: '/api/sheets',
    action: 'sheet.read',
    summary: 'The newest edition of each service sheet',
    query: pageQuerySchema,
    status: 200,
    response: pageOf(sheetRowSchema),
  },
  getSheet: {
    method: 'GET',
    path: '/api/sheets/:family',
    action: 'sheet.read',
    summary: 'A service sheet',
    params: family,
    query: z.strictObject({ edition: z.coerce.number().int().positive().optional() }),
    status: 200,
    response: sheetPageSchema,
  },
  addSheet: {
    method: 'POST',
    path: '/api/sheets',
    action: 'sheet.write',
    summary: 'Add a service sheet, or its next edition',
    body: newSheetSchema,
    status: 201,
    response: sheetRowSchema,
  },
  listUnits: {
    method: 'GET',
    path: '/api/units',
    action: 'unit.read',
    summary: 'The units, newest first',
    query: pageQuerySchema.extend({ find: z.string().max(100).optional(), stage: z.string().max(20).optional() }),
    status: 200,
    response: pageOf(unitRowSchema),
  },
  takeInUnit: {
    method: 'POST',
    path: '/api/units',
    action: 'unit.take-in',
    summary: 'Take in a unit; the same serial number again is a 409 until a reason is given',
    body: newUnitSchema,
    status: 201,
    response: unitSchema,
    idempotent: true,
  },
  getUnit: {
    method: 'GET',
    path: '/api/units/:number',
    action: 'unit.read',
    summary: 'Everything about a unit: plate, stage, readiness, history',
    params: unitNumber,
    status: 200,
    response: unitPageSchema,
  },
  giveFamily: {
    method: 'POST',
    path: '/api/units/:number/family',
    action: 'unit.take-in',
    summary: 'Give a unit that came in without one its control family; 409 where it has one',
    params: unitNumber,
    body: giveFamilySchema,
    status: 200,
    response: unitSchema,
    idempotent: true,
  },
  recordOverride: {
    method: 'POST',
    path: '/api/units/:number/overrides',
    action: 'override.record',
    summary: 'A lead opens the dead-test gate with a reason',
    params: unitNumber,
    body: overrideSchema,
    status: 201,
    response: eventStoredSchema,
    idempotent: true,
  },
  recordCapture: {
    method: 'POST',
    path: '/api/units/:number/captures',
    action: 'capture.record',
    summary: 'Store a capture',
    params: unitNumber,
    body: newCaptureSchema,
    status: 201,
    response: captureStoredSchema,
    idempotent: true,
  },
  getCapture: {
    method: 'GET',
    path: '/api/captures/:id',
    action: 'unit.read',
    summary: 'A capture with its file and answer',
    params: byId,
    status: 200,
    response: capturePageSchema,
  },
  recordReading: {
    method: 'POST',
    path: '/api/units/:number/readings',
    action: 'reading.record',
    summary: 'Store a reading; the server judges it again',
    params: unitNumber,
    body: newReadingSchema,
    status: 201,
    response: eventStoredSchema,
    idempotent: true,
  },
  recordInspection: {
    method: 'POST',
    path: '/api/units/:number/inspections',
    action: 'reading.record',
    summary: 'Store an inspection',
    params: unitNumber,
    body: newInspectionSchema,
    status: 201,
    response: eventStoredSchema,
    idempotent: true,
  },
  recordRepair: {
    method: 'POST',
    path: '/api/units/:number/repairs',
    action: 'repair.record',
    summary: 'Store a repair',
    params: unitNumber,
    body: newRepairSchema,
    status: 201,
    response: eventStoredSchema,
    idempotent: true,
  },
  recordRun: {
    method: 'POST',
    path: '/api/units/:number/runs',
    action: 'run.record',
    summary: 'Store a bench log, whole',
    params: unitNumber,
    body: newRunSchema,
    status: 201,
    response: runStoredSchema,
    idempotent: true,
  },
  getRun: {
    method: 'GET',
    path: '/api/runs/:id',
    action: 'unit.read',
    summary: 'A bench log',
    params: byId,
    status: 200,
    response: runPageSchema,
  },
  tellLive: {
    method: 'POST',
    path: '/api/live',
    action: 'live.tell',
    summary: 'Tell what goes on at a bench while it goes on; a part that is sent twice is shown once',
    body: newLiveSchema,
    status: 200,
    response: liveTakenSchema,
  },
  hearLive: {
    method: 'GET',
    path: '/api/live',
    action: 'live.hear',
    summary: 'Hear what goes on at the benches, of one unit or of all: first the work as it stands, then what follows',
    query: liveQuerySchema,
    status: 200,
    response: liveEventSchema,
    stream: true,
  },
  signOff: {
    method: 'POST',
    path: '/api/units/:number/sign-off',
    action: 'unit.sign-off',
    summary: 'Sign a unit off: its readiness tag stands',
    params: unitNumber,
    body: signOffSchema,
    status: 201,
    response: tagPageSchema,
  },
  getUnitTag: {
    method: 'GET',
    path: '/api/units/:number/tag',
    action: 'tag.read',
    summary: 'The newest tag of a unit',
    params: unitNumber,
    status: 200,
    response: tagPageSchema,
  },
  withdrawTag: {
    method: 'POST',
    path: '/api/tags/:tag/withdrawal',
    action: 'tag.withdraw',
    summary: 'A lead withdraws a tag with a reason',
    params: tagNumber,
    body: withdrawTagSchema,
    status: 201,
    response: tagPageSchema,
  },
  getPublicTag: {
    method: 'GET',
    path: '/api/public/tags/:tag',
    action: 'public-tag.read',
    summary: 'Whether a tag still stands, for its buyer',
    params: tagNumber,
    query: publicTagQuerySchema,
    status: 200,
    response: publicTagSchema,
  },
  getPublicKeys: {
    method: 'GET',
    path: '/api/public/keys',
    action: 'public-tag.read',
    summary: 'The public keys of the tags, as a JWK Set (RFC 7517)',
    status: 200,
    response: publicKeysSchema,
  },
} as const satisfies Record<string, Route>;

export type RouteName = keyof typeof routes;
type Part<R, K extends string> = R extends Record<K, z.ZodType> ? z.input<R[K & keyof R] & z.ZodType> : undefined;
export type RequestBody<N extends RouteName> = Part<(typeof routes)[N], 'body'>;
export type RequestQuery<N extends RouteName> = Part<(typeof routes)[N], 'query'>;
export type RequestParams<N extends RouteName> = Part<(typeof routes)[N], 'params'>;
export type Answer<N extends RouteName> = z.output<(typeof routes)[N]['response']>;

type Texts = Record<string, string | number | boolean | undefined> | undefined;

/**
 * The path of a route with its parameters filled in and its query appended.
 *
 * @example routeUrl('getUnit', { params: { number: 412 } }) // '/api/units/412'
 */
export function routeUrl(name: RouteName, request: { params?: Texts; query?: Texts } = {}): string {
  const path = routes[name].path.replace(/:(\w+)/g, (_, key: string) => encodeURIComponent(String(request.params?.[key])));
  const query = new URLSearchParams(
    Object.entries(request.query ?? {}).flatMap(([key, value]) => (value === undefined ? [] : [[key, String(value)]])),
  );
  return query.size > 0 ? `${path}?${query.toString()}` : path;
}
