import type { Request, RequestHandler } from 'express';
import type { TagPage } from '../../../shared/api/tags.js';
import type { AppDependencies } from '../../app.js';
import { ownOrigin } from '../../auth/origin.js';
import { ConflictError } from '../../errors.js';
import type { StoredTag } from '../../history/tag-store.js';
import { readUnitHistory } from '../../history/unit-history.js';
import { isLoopback } from '../../loopback.js';
import type { RegisterRoute } from '../../route.js';
import { publicKeys } from './signing-key-store.js';
import { signaturePart } from './tag-signature.js';
import { publicTag, signOff, tagOfUnit, withdraw } from './tags-service.js';

function tagPageOf(tag: StoredTag, base: string): TagPage {
  return {
    content: tag.content,
    state: { number: tag.number, standing: tag.withdrawn ? 'withdrawn' : 'stands', signedOffAt: tag.signedOffAt },
    ...(tag.withdrawn ? { withdrawn: tag.withdrawn } : {}),
    url: `${base}/t/${tag.number}/${signaturePart(tag.jws)}`,
    jws: tag.jws,
  };
}

export function registerTagRoutes(route: RegisterRoute, deps: AppDependencies, limits: Record<'publicTag', RequestHandler[]>): void {
  const { signingKey } = deps;
  const { publicUrl } = deps.config;
  const base = (request: Request): string => publicUrl ?? ownOrigin(request, publicUrl);

  route('signOff', async ({ params, body, person, trx, now, http }) =>
    tagPageOf(await signOff(trx, params.number, body.seen, person, now, await signingKey()), base(http.request)),
  );

  route('getUnitTag', async ({ params, trx, http }) => {
    const { unit, shop } = await readUnitHistory(trx, params.number);
    const tag = await tagOfUnit(trx, unit.id, unit.number);
    if (!shop.demo && (publicUrl === undefined || isLoopback(publicUrl))) {
      throw new ConflictError(
        `Tag ${tag.number} can’t be printed: no buyer could reach the address in its QR code.`,
        'Set REFETTLE_PUBLIC_URL to the address under which buyers reach this server, and start it again.',
      );
    }
    return tagPageOf(tag, base(http.request));
  });

  route('withdrawTag', async ({ params, body, person, trx, now, http }) =>
    tagPageOf(await withdraw(trx, params.tag, body.reason, person, now), base(http.request)),
  );

  route(
    'getPublicTag',
    async ({ params, query, trx, now, http }) => {
      const answer = await publicTag(trx, params.tag, { signature: query.signature, word: query.word }, now);
      http.response.locals['ours'] = answer.standing !== 'not ours';
      return answer;
    },
    { limits: limits.publicTag },
  );

  route('getPublicKeys', ({ trx }) => publicKeys(trx));
}
