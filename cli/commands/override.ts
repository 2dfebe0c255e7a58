import { signOnIfShared } from '../bench/sign-on.js';
import type { Context } from '../context.js';
import { EXIT } from '../exit-codes.js';
import { printJson } from '../render/json.js';
import { unitLabel } from '../render/words.js';

/** A lead opens the dead-test gate with a reason. Only with the server: nobody opens a gate that nobody else can see open. */
export async function runOverride(
  { number, reason, json }: { number: number; reason?: string; json?: boolean },
  context: Context,
): Promise<number> {
  await signOnIfShared(context);
  const why =
    reason ??
    (await context.prompt.text({
      message: 'Why may it be energised without the dead tests',
      refuse: (text) => (text.length < 10 ? 'say why, in at least 10 characters' : undefined),
      instead: 'give it with --reason',
    }));
  const api = await context.api();
  const { event } = await api.call('recordOverride', {
    params: { number },
    body: { gate: 'dead tests', reason: why },
    idempotencyKey: context.newId(),
  });
  if (json === true) printJson(context, event);
  else
    context.stdout.write(
      `${unitLabel(number)}: ${event.by.name} opened the dead-test gate. It is on the unit's history, with the reason.\n`,
    );
  return EXIT.good;
}
