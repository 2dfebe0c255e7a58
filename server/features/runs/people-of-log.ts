import { mayDo } from '../../../shared/api/roles.js';
import type { User } from '../../../shared/api/sessions.js';
import type { PersonRef } from '../../../shared/history/events.js';
import type { RunLog } from '../../../shared/script/run-log.js';
import { personAtBench, type BenchRef } from '../../auth/bench-store.js';
import type { Db } from '../../db.js';
import { InvalidError, RoleError, type Fault } from '../../errors.js';
import { refOf } from '../../history/unit-history.js';

/** Who came before the step with this index, of those whom the log names. */
const hadCome = ({ people }: RunLog, personId: string, index: number): boolean =>
  people.some(({ person, steps }) => person.id === personId && steps <= index);

function faultsOf(log: RunLog, sender: User, bench: BenchRef | undefined): Fault[] {
  const faults: Fault[] = [];
  log.people.forEach(({ person, how }, index) => {
    const pointer = `/people/${String(index)}`;
    if ((how === 'began') !== (index === 0)) faults.push({ pointer: `${pointer}/how`, reason: 'a run is begun once, and first of all' });
    if (index === 0 && person.id !== sender.id)
      faults.push({ pointer: `${pointer}/person`, reason: `it comes in the name of ${sender.name}, so ${sender.name} must have begun it` });
    else if (!bench && person.id !== sender.id)
      faults.push({
        pointer: `${pointer}/person`,
        reason: `only a shared bench sends what several did; this is ${sender.name}’s own sign-in`,
      });
  });
  log.steps.forEach(({ by }, index) => {
    if (by === undefined || by === sender.id || hadCome(log, by, index)) return;
    faults.push({ pointer: `/steps/${String(index)}/by`, reason: 'nobody with this id had come to the run by then' });
  });
  return faults;
}

/**
 * A bench log with its people as the shop knows them: a bench says only who, never what somebody is called or may do. Each must have
 * signed on at the bench that sends it, still work here, and be allowed to run scripts; by a person's own token there is only that person.
 */
export async function withPeopleOfTheShop(db: Db, log: RunLog, sender: User, bench: BenchRef | undefined): Promise<RunLog> {
  const faults = faultsOf(log, sender, bench);
  if (faults.length > 0) throw new InvalidError(faults);
  const known = new Map<string, PersonRef>([[sender.id, refOf(sender)]]);
  for (const [index, { person }] of log.people.entries()) {
    if (known.has(person.id) || !bench) continue;
    const found = await personAtBench(db, bench.id, person.id);
    if (!found)
      throw new InvalidError([
        { pointer: `/people/${String(index)}/person`, reason: `nobody with this id has signed on at ${bench.name}` },
      ]);
    const { user, active } = found;
    if (!active) throw new RoleError(`${user.name} no longer works here, so nothing more is taken down in that name.`);
    if (!mayDo(user.role, 'run.record')) throw new RoleError(`${user.name} is ${user.role} and runs no scripts.`);
    known.set(user.id, refOf(user));
  }
  return { ...log, people: log.people.map((one) => ({ ...one, person: known.get(one.person.id) ?? one.person })) };
}
