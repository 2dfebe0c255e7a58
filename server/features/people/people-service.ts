import { v7 as newId } from 'uuid';
import type { z } from 'zod';
import type { inviteSchema, LinkKind, PersonRow } from '../../../shared/api/people.js';
import type { Role } from '../../../shared/api/roles.js';
import type { newPersonSchema, User } from '../../../shared/api/sessions.js';
import { askOwnPassword } from '../../auth/own-password.js';
import { hashPassword } from '../../auth/password.js';
import {
  holdPerson,
  insertPerson,
  isThereAnotherAdmin,
  personRow,
  readPersonRow,
  setActive,
  setPassword,
  setRole,
  type PersonWithPassword,
} from '../../auth/people-store.js';
import { deleteLinks, deleteLinksMadeBy, findLink, makeLink, useLink, type PersonLink } from '../../auth/person-links.js';
import { revokeSessions } from '../../auth/session-store.js';
import type { Db } from '../../db.js';
import { ConflictError, InvalidError, NotFoundError, NotSignedInError, RoleError } from '../../errors.js';
import { audit, personSubject } from '../../history/audit.js';
import { refOf } from '../../history/unit-history.js';
import type { IfRefused } from '../../route.js';

/** Who does it, and when. */
interface Doing {
  who: User;
  now: Date;
}

const noSuchPerson = (): NotFoundError => new NotFoundError('There is no such person.');
const emailTaken = (): ConflictError =>
  new ConflictError('Somebody has this e-mail address already.', 'Use another address, or that account: it may be deactivated.');

async function held(trx: Db, id: string, why: 'out' | 'for change'): Promise<PersonWithPassword> {
  const person = await holdPerson(trx, id, why);
  if (!person) throw noSuchPerson();
  return person;
}

export async function createPerson(trx: Db, { password, ...told }: z.output<typeof newPersonSchema>, { who, now }: Doing): Promise<User> {
  const person = { id: newId(), ...told };
  const added = await insertPerson(trx, { ...person, passwordHash: await hashPassword(password), createdAt: now });
  if (!added) throw emailTaken();
  const after = { email: person.email, role: person.role };
  await audit(trx, { who: refOf(who), what: 'person.created', subject: personSubject(person), after, at: now });
  return person;
}

interface NewLink {
  person: PersonRow;
  token: string;
  kind: LinkKind;
  expiresAt: Date;
}

/** Somebody new: on the books at once, with no password until they set one at the link. */
export async function invite(trx: Db, told: z.output<typeof inviteSchema>, { who, now }: Doing): Promise<NewLink> {
  const person = { id: newId(), ...told };
  const added = await insertPerson(trx, { ...person, passwordHash: undefined, createdAt: now });
  if (!added) throw emailTaken();
  const link = await makeLink(trx, { personId: person.id, kind: 'invitation', madeBy: who.id, now });
  const after = { email: person.email, role: person.role, linkExpiresAt: link.expiresAt.toISOString() };
  await audit(trx, { who: refOf(who), what: 'person.invited', subject: personSubject(person), after, at: now });
  return { person: await readPersonRow(trx, person.id, now), kind: 'invitation', ...link };
}

/** For a forgotten password, or an invitation that ran out. What was before stays good until the link is used. */
export async function linkFor(trx: Db, id: string, { who, now }: Doing): Promise<NewLink> {
  if (id === who.id)
    throw new RoleError('Nobody makes a link for themselves: change your password on your account page, or ask another admin.');
  const { user, active, passwordHash } = await held(trx, id, 'for change');
  if (!active) throw new ConflictError(`${user.name} is deactivated.`, 'Reactivate the person first.');
  const kind: LinkKind = passwordHash === undefined ? 'invitation' : 'reset';
  const link = await makeLink(trx, { personId: id, kind, madeBy: who.id, now });
  const after = { kind, linkExpiresAt: link.expiresAt.toISOString() };
  await audit(trx, { who: refOf(who), what: 'person.link-made', subject: personSubject(user), after, at: now });
  return { person: await readPersonRow(trx, id, now), kind, ...link };
}

const usedUp = (): NotSignedInError =>
  new NotSignedInError('This link is used up, too old, or none of ours. An admin of the shop makes a new one.');

/** Whose link this is; nothing is used up by looking. */
export async function lookAtLink(db: Db, token: string, now: Date): Promise<{ link: PersonLink; person: PersonRow }> {
  const link = await findLink(db, token, now);
  const person = link && (await personRow(db, link.personId, now));
  if (!person || person.state === 'deactivated') throw usedUp();
  return { link, person };
}

/** The person sets a password by the link. Two who use it at the same moment get one yes between them. */
export async function setPasswordByLink(trx: Db, token: string, password: string, now: Date): Promise<User> {
  const link = await findLink(trx, token, now);
  const person = link && (await holdPerson(trx, link.personId, 'for change'));
  if (!person?.active || !(await useLink(trx, token, now))) throw usedUp();
  const ended = await setPassword(trx, person.user.id, await hashPassword(password), now);
  await audit(trx, {
    who: refOf(person.user),
    what: person.passwordHash === undefined ? 'person.joined' : 'person.password-reset',
    subject: personSubject(person.user),
    after: { sessionsEnded: ended },
    at: now,
  });
  return person.user;
}

async function keepAnAdmin(trx: Db, { user, active }: PersonWithPassword): Promise<void> {
  if (user.role === 'admin' && active && !(await isThereAnotherAdmin(trx, user.id)))
    throw new ConflictError(
      `${user.name} is the last active admin: without one nobody could let anybody in.`,
      'Make somebody else an admin first.',
    );
}

/** People must be locked: two admins who demote each other come one after the other, and the second is none any more. */
export async function changeRole(trx: Db, id: string, role: Role, { who, now }: Doing): Promise<PersonRow> {
  if (id === who.id) throw new RoleError('Nobody changes their own role: another admin does it.');
  const person = await held(trx, id, 'out');
  const before = person.user.role;
  if (before !== role) {
    if (role !== 'admin') await keepAnAdmin(trx, person);
    await setRole(trx, id, role);
    const linksEnded = before === 'admin' ? await deleteLinksMadeBy(trx, id) : 0;
    const change = { before: { role: before }, after: { role, ...(linksEnded > 0 ? { linksEnded } : {}) } };
    await audit(trx, { who: refOf(who), what: 'person.role-changed', subject: personSubject(person.user), ...change, at: now });
  }
  return readPersonRow(trx, id, now);
}

/** Somebody no longer works here: no session, no link for them or by them, no sign-in. What they did stays theirs. People must be locked. */
export async function deactivate(trx: Db, id: string, reason: string, { who, now }: Doing): Promise<PersonRow> {
  const person = await held(trx, id, 'out');
  if (!person.active) throw new ConflictError(`${person.user.name} is deactivated already.`);
  await keepAnAdmin(trx, person);
  await setActive(trx, id, false);
  const sessionsEnded = await revokeSessions(trx, id, now);
  await deleteLinks(trx, id);
  const linksEnded = await deleteLinksMadeBy(trx, id);
  await audit(trx, {
    who: refOf(who),
    what: 'person.deactivated',
    subject: personSubject(person.user),
    before: { active: true },
    after: { active: false, reason, sessionsEnded, ...(linksEnded > 0 ? { linksEnded } : {}) },
    at: now,
  });
  return readPersonRow(trx, id, now);
}

/** With the password of before; the sessions of before stay ended. */
export async function activate(trx: Db, id: string, { who, now }: Doing): Promise<PersonRow> {
  const person = await held(trx, id, 'for change');
  if (person.active) throw new ConflictError(`${person.user.name} is active already.`);
  await setActive(trx, id, true);
  const change = { before: { active: false }, after: { active: true } };
  await audit(trx, { who: refOf(who), what: 'person.activated', subject: personSubject(person.user), ...change, at: now });
  return readPersonRow(trx, id, now);
}

/** Every other session ends; answers how many. */
export async function changePassword(
  trx: Db,
  { oldPassword, newPassword }: { oldPassword: string; newPassword: string },
  { who, now, token, ifRefused }: Doing & { token: string | undefined; ifRefused: IfRefused },
): Promise<number> {
  await askOwnPassword(trx, who, { password: oldPassword, pointer: '/oldPassword', wanted: 'a new password', now, ifRefused });
  if (oldPassword === newPassword) throw new InvalidError([{ pointer: '/newPassword', reason: 'is the old one' }]);
  const sessionsEnded = await setPassword(trx, who.id, await hashPassword(newPassword), now, token);
  await deleteLinks(trx, who.id);
  await audit(trx, { who: refOf(who), what: 'person.password-changed', subject: personSubject(who), after: { sessionsEnded }, at: now });
  return sessionsEnded;
}
