import { isCharged } from '../../shared/script/charge.js';
import { refuseStranger } from '../bench/refuse-stranger.js';
import { signOn } from '../bench/sign-on.js';
import type { Context } from '../context.js';
import { NobodyToAskError, UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { sendNow } from '../journal/deliver.js';
import { heldWords, takeLock } from '../journal/lock.js';
import { closeEnded, closeRun, runLock, runWords } from '../journal/open-runs.js';
import { cutOf, lastPersonIn, RunJournal, writtenRun } from '../journal/run-journal.js';
import { SteadyClock } from '../journal/steady-clock.js';
import { MAY_BE_CHARGED } from '../render/charge-words.js';
import { deliveryWords } from '../render/delivery-words.js';
import { printJson } from '../render/json.js';
import { byOf, closedInstead, openRunNamed } from './resume.js';

const REASON_AT_MOST = 500;

/** Closes a run that nobody will go on with, with a reason; what it recorded is kept and sent. */
export async function runAbandon(
  { run, reason: told, json }: { run?: string | undefined; reason?: string | undefined; json?: boolean | undefined },
  context: Context,
): Promise<number> {
  const closed = closedInstead(run, context, await closeEnded(context));
  if (closed) {
    context.stderr.say(
      `The ${closed.entry.what} has ended and is closed: it can’t be abandoned any more.${closed.where === 'waiting' ? ' It waits to be sent: refettle sync' : ''}`,
    );
    return EXIT.notGood;
  }
  if (told === undefined && !context.interactive) throw new NobodyToAskError('Why is it abandoned?', 'give it with --reason');
  const open = await openRunNamed(run, context, 'abandon');
  if (!open) return EXIT.notGood;
  const reason = (
    told ?? (await context.prompt.text({ message: 'Why is it abandoned', refuse: refusalOfReason, instead: 'give it with --reason' }))
  ).trim();
  const refusal = refusalOfReason(reason);
  if (refusal !== undefined) throw new UsageError(`The reason: ${refusal}`);
  const person = await signOn(context, 'resume');
  refuseStranger(context, person, lastPersonIn(open.written));
  const { id } = open.written.header;
  const lock = await takeLock(context, runLock(id), { what: `${runWords(open.written)}, being abandoned by ${person.name}`, run: id });
  if ('owner' in lock) {
    context.stderr.say(`It is going on: ${heldWords(lock.owner)}.`);
    return EXIT.notGood;
  }
  try {
    const written = writtenRun(context.home, id);
    const cut = cutOf(context.home, written);
    const journal = RunJournal.goOn(context.home, written);
    const clock = new SteadyClock(
      () => context.now(),
      () => performance.now(),
      (jump) => journal.jump(jump),
      written.lastAt,
    );
    if (cut) journal.record({ ...cut, ...byOf(written) });
    if (open.script && isCharged(written.results, open.script, undefined, written.begun?.stepId)) context.stderr.say(MAY_BE_CHARGED);
    const at = clock.now().toISOString();
    journal.person({ person, at, how: 'abandoned', reason });
    journal.end(at, true);
    journal.close();
    const entry = closeRun(context, writtenRun(context.home, id));
    const delivery = await sendNow(context, entry);
    const sent = delivery.state === 'sent';
    if (!sent) context.stderr.say(deliveryWords(delivery));
    if (json === true) printJson(context, { run: id, unit: written.header.unit, script: written.header.script.name, reason, sent });
    else
      context.stdout.write(`Abandoned: ${entry.what}. ${sent ? 'What it recorded is sent.' : 'What it recorded is kept; not sent yet.'}\n`);
    return sent ? EXIT.good : EXIT.server;
  } finally {
    lock.release();
  }
}

const refusalOfReason = (reason: string): string | undefined =>
  reason.trim() === '' ? 'say why' : reason.length > REASON_AT_MOST ? `at most ${REASON_AT_MOST} characters` : undefined;
