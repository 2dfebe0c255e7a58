import type { MadeLink } from '../../../shared/api/people.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { printJson } from '../../render/json.js';
import { dayText, timeText } from '../../render/words.js';

/** A one-time link, said once: it is not kept anywhere. */
export function showLink({ person, link }: MadeLink, json: boolean | undefined, context: Context): number {
  if (json === true) {
    printJson(context, { person, link });
    return EXIT.good;
  }
  const until = `${dayText(link.expiresAt)}, ${timeText(link.expiresAt)}`;
  context.stdout.write(
    link.kind === 'invitation'
      ? `${person.name} is invited as ${person.role}. By this link they set their password, once, until ${until}:\n`
      : `By this link ${person.name} sets a new password, once, until ${until}. The old one is good until then:\n`,
  );
  context.stdout.writeExactly(`  ${link.url}\n`);
  context.stderr.say('It is shown only now. Hand it over yourself: whoever has it is let in.');
  if (link.onlyHere)
    context.stderr.say(
      'Its address opens only on this computer: say by REFETTLE_SERVER where the others find the server, and make the link again.',
    );
  return EXIT.good;
}
