import { v7 as newId } from 'uuid';
import type { z } from 'zod';
import type { User } from '../../../shared/api/sessions.js';
import type { signOffSchema, PublicTag, TagContent } from '../../../shared/api/tags.js';
import type { UnitEvent } from '../../../shared/history/events.js';
import { readiness, type Readiness } from '../../../shared/readiness/readiness.js';
import { cautionsOnTag, mendedOnTag, testedOnTag } from '../../../shared/readiness/tag-content.js';
import { unitNumberText } from '../../../shared/unit-number.js';
import type { Db } from '../../db.js';
import { ConflictError, GateError, NotFoundError } from '../../errors.js';
import { audit } from '../../history/audit.js';
import { readShop } from '../../history/shop-store.js';
import { findTag, insertTag, newestTag, unitNumberOfTag, type StoredTag } from '../../history/tag-store.js';
import {
  arrivingNow,
  eventsOf,
  factsOf,
  openUnitHistory,
  recordEvents,
  refOf,
  withdrawTag,
  type UnitHistory,
} from '../../history/unit-history.js';
import { newLookUpWord } from './look-up-word.js';
import type { SigningKey } from './signing-key.js';
import { findSigningKey, refuseEndedKey } from './signing-key-store.js';
import { kidOf, sameText, signaturePart, signTag, verifiedContent } from './tag-signature.js';

/** A tag hangs on a machine in a stranger's kitchen: it carries first names only. */
const firstName = (name: string): string => name.trim().split(/\s+/)[0] ?? name;

type Seen = z.output<typeof signOffSchema>['seen'];

/** Whoever signs must have looked at what stands now. Four eyes is judged for the signer only when signing, so both views of it are the same look. */
function refuseWhereChanged(seen: Seen, now: Readiness, forSigner: Readiness): void {
  const changed = now.rules.filter((rule, index) => {
    const saw = seen.find(({ id }) => id === rule.id)?.state;
    return saw !== rule.state && !(rule.id === 'four-eyes' && saw !== undefined && saw === forSigner.rules[index]?.state);
  });
  const gone = seen.filter(({ id }) => !now.rules.some((rule) => rule.id === id));
  if (changed.length === 0 && gone.length === 0) return;
  const names = [...changed.map(({ title, state }) => `${title} is now ${state}`), ...gone.map(({ id }) => `${id} is no rule here`)];
  throw new ConflictError(`The rules have changed since you looked: ${names.join('; ')}.`, 'Look at the unit again, then sign.');
}

/** A lead's word that a unit is ready, asked for at every rule again in the moment of signing. */
export async function signOff(db: Db, unitNumber: number, seen: Seen, person: User, now: Date, key: SigningKey): Promise<StoredTag> {
  const history = await openUnitHistory(db, unitNumber);
  const { unit, shop, tag: before } = history;
  const number = unitNumberText(unit.number);
  if (before && !before.withdrawn)
    throw new ConflictError(`Tag ${before.number} stands on unit ${number} already.`, 'Withdraw it first, if it must be signed again.');
  const by = refOf(person);
  const facts = factsOf(history, eventsOf(history));
  const judged = readiness(facts, by);
  refuseWhereChanged(seen, readiness(facts), judged);
  const open = judged.rules.filter((rule) => rule.state !== 'met');
  if (open.length > 0) {
    const reasons = open.map(({ title, state, evidence, how }) => `${title}: ${state}, ${evidence}.${how === undefined ? '' : ` ${how}`}`);
    throw new GateError(`Unit ${number} can’t be signed off`, reasons, 'meet each rule named here, then sign');
  }

  await refuseEndedKey(db, key, now);
  const running = (before?.running ?? 0) + 1;
  const content: TagContent = {
    tag: `${number}-${String(running)}`,
    lookUpWord: newLookUpWord(),
    sample: shop.demo,
    appliance: unit.appliance,
    plate: unit.plate,
    tested: testedOnTag(facts),
    mended: mendedOnTag(facts).map((mended) => ({ ...mended, by: firstName(mended.by) })),
    signedOffAt: now.toISOString(),
    signedOffBy: firstName(person.name),
    fourEyes: shop.fourEyes,
    warrantyMonths: shop.warrantyMonths,
    cautions: cautionsOnTag(facts, unit.plate.massKg),
    shop: { name: shop.name, address: shop.address, phone: shop.phone },
  };
  await insertTag(db, { unitId: unit.id, running, content, jws: await signTag(content, key), signedOffBy: person.id });
  const event: UnitEvent = {
    id: newId(),
    at: now.toISOString(),
    by,
    simulated: false,
    kind: 'sign-off',
    tag: content.tag,
    rulesMet: judged.met,
    fourEyes: shop.fourEyes,
  };
  await recordEvents(db, history, [{ event, orderedAt: arrivingNow(history, now) }], now);
  await audit(db, {
    who: by,
    what: 'tag.signed',
    subject: { kind: 'tag', id: content.tag, name: `tag ${content.tag}` },
    after: { unit: number, fourEyes: shop.fourEyes, rulesMet: judged.met },
    at: now,
  });
  return storedTag(db, content.tag);
}

async function storedTag(db: Db, number: string): Promise<StoredTag> {
  const tag = await findTag(db, number);
  if (!tag) throw new NotFoundError(`There is no tag ${number}.`);
  return tag;
}

/** A lead takes a tag back. */
export async function withdraw(db: Db, number: string, reason: string, person: User, now: Date): Promise<StoredTag> {
  const unitNumber = await unitNumberOfTag(db, number);
  if (unitNumber === undefined) throw new NotFoundError(`There is no tag ${number}.`);
  const history = await openUnitHistory(db, unitNumber);
  const { tag } = history;
  if (!tag || tag.number !== number || tag.withdrawn) {
    const stored = await storedTag(db, number);
    throw new ConflictError(`Tag ${number} was withdrawn already: ${stored.withdrawn?.reason ?? 'another tag stands in its place'}.`);
  }
  await withdrawTag(db, { ...history, tag } satisfies UnitHistory, { by: refOf(person), reason, now });
  return storedTag(db, number);
}

export async function tagOfUnit(db: Db, unitId: string, unitNumber: number): Promise<StoredTag> {
  const tag = await newestTag(db, unitId);
  if (!tag) throw new NotFoundError(`Unit ${unitNumberText(unitNumber)} never had a tag.`);
  return tag;
}

/** What a buyer is told. A number that is not there, a wrong signature and a wrong word get one and the same answer. */
export async function publicTag(
  db: Db,
  number: string,
  proof: { signature: string | undefined; word: string | undefined },
  now: Date,
): Promise<PublicTag> {
  const checkedAt = now.toISOString();
  const tag = await findTag(db, number.trim());
  const { signature, word } = proof;
  const signatureFits = sameText(signature ?? '', tag ? signaturePart(tag.jws) : 'no tag') && signature !== undefined;
  const wordFits = sameText((word ?? '').trim().toUpperCase(), tag?.lookUpWord ?? 'no tag') && word !== undefined;
  const proved = (signatureFits || wordFits) && (signature === undefined || signatureFits) && (word === undefined || wordFits);
  const key = tag && proved ? await findSigningKey(db, kidOf(tag.jws)) : undefined;
  const content = tag && key ? await verifiedContent(tag.jws, key) : undefined;
  if (!tag || content?.tag !== tag.number) {
    const { name, address, phone } = await readShop(db);
    return {
      standing: 'not ours',
      reason: 'There is no such tag, or its signature or look-up word is another.',
      checkedAt,
      shop: { name, address, phone },
    };
  }
  return tag.withdrawn
    ? { standing: 'withdrawn', content, checkedAt, withdrawnAt: tag.withdrawn.at, jws: tag.jws }
    : { standing: 'stands', content, checkedAt, jws: tag.jws };
}
