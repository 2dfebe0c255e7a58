import { ROLES_BY_ACTION } from '../../../shared/api/roles.js';
import { listBenches, setBenchRig } from '../../auth/bench-store.js';
import { listPinStates } from '../../auth/pin-store.js';
import type { RateLimits } from '../../auth/rate-limits.js';
import { cursorOf, pageOf, uuidCursor } from '../../paging.js';
import type { RegisterRoute } from '../../route.js';
import { endBench, makeBench, ownBench, renewToken } from './benches-service.js';
import { pinStateOf, putPinOfAnother, setOwnPin, takePinAway } from './pins-service.js';
import { signOnAtBench } from './sign-on-service.js';

export function registerBenchRoutes(route: RegisterRoute, limits: Pick<RateLimits, 'signOn' | 'ownPin'>): void {
  route('listBenches', async ({ query, trx }) => {
    const benches = await listBenches(trx, uuidCursor(query.cursor), query.limit + 1);
    return pageOf(benches, query.limit, (bench) => cursorOf(bench.id));
  });
  route('createBench', ({ body, person, trx, now }) => makeBench(trx, body.name, person, now));
  route('renewBenchToken', ({ params, person, trx, now }) => renewToken(trx, params.id, person, now));
  route('revokeBench', ({ params, person, trx, now }) => endBench(trx, params.id, person, now));

  route('ownBench', ({ bench, trx }) => ownBench(trx, bench));
  route('reportRig', async ({ bench, body, trx, now }) => {
    await setBenchRig(trx, bench.id, body, now);
    return ownBench(trx, bench);
  });
  route('signOnAtBench', ({ bench, body, trx, now, ifRefused }) => signOnAtBench(trx, bench, body, { now, ifRefused }), {
    limits: limits.signOn,
  });

  route('getOwnPin', ({ person, trx }) => pinStateOf(trx, person.id));
  route('setOwnPin', ({ person, body, trx, now, ifRefused }) => setOwnPin(trx, person, body, { now, ifRefused }), {
    limits: limits.ownPin,
  });
  route('listPins', async ({ query, trx }) => {
    const states = await listPinStates(trx, ROLES_BY_ACTION['run.record'], uuidCursor(query.cursor), query.limit + 1);
    return pageOf(states, query.limit, ({ person }) => cursorOf(person.id));
  });
  route('setPin', ({ params, body, person, trx, now }) => putPinOfAnother(trx, params.id, body.pin, person, now));
  route('clearPin', ({ params, person, trx, now }) => takePinAway(trx, params.id, person, now));
}
