import type { Context } from '../context.js';
import { EXIT } from '../exit-codes.js';
import { closeEnded, openRuns, type OpenRun } from '../journal/open-runs.js';
import { waitingEntries } from '../journal/outbox.js';
import { lastPersonIn } from '../journal/run-journal.js';
import { printJson } from '../render/json.js';
import { padRight, widthOf } from '../render/columns.js';
import { peopleText, placeText, stateText } from '../render/open-run-text.js';
import { dayText, timeText, unitLabel } from '../render/words.js';

interface ListedRun {
  run: string;
  unit: number;
  script: string;
  state: string;
  done: number;
  of: number | null;
  place: string;
  by: string;
  people: string;
  since: string;
  damage?: { line: number; reason: string };
}

/** The runs of this bench: going, parked, broken off, and closed ones that wait to be sent. */
export async function runRuns({ json }: { json?: boolean }, context: Context): Promise<number> {
  await closeEnded(context);
  const { runs, unreadable } = openRuns(context);
  const listed = [...runs.map(describe), ...closedAndWaiting(context)];
  for (const file of unreadable)
    context.stderr.say(`${file}: its first line is damaged, so which run it was can't be said. It is left where it is.`);
  if (json === true) printJson(context, { runs: listed.map(({ place: _place, ...run }) => run), unreadable });
  else if (listed.length === 0) context.stdout.write('No run is open on this bench, and none waits to be sent.\n');
  else context.stdout.write(`${(await table(listed, context)).join('\n')}\n`);
  return unreadable.length > 0 ? EXIT.badInput : EXIT.good;
}

function describe(open: OpenRun): ListedRun {
  const { written, owner, done, of } = open;
  const { header, damage, stop, lastAt } = written;
  return {
    run: header.id,
    unit: header.unit,
    script: header.script.name,
    state: stateText(open),
    done,
    of: of ?? null,
    place: placeText(open),
    by: lastPersonIn(written).name,
    people: peopleText(open),
    since: owner?.since ?? stop?.at ?? lastAt,
    ...(damage ? { damage: { line: damage.line, reason: damage.reason } } : {}),
  };
}

function closedAndWaiting(context: Context): ListedRun[] {
  return waitingEntries(context.home).entries.flatMap((entry) => {
    if (entry.route !== 'recordRun') return [];
    const { body, by, id, params, refused, madeAt } = entry;
    const done = new Set(body.steps.map(({ stepId }) => stepId)).size;
    const state = refused ? 'closed, refused by the server' : 'closed, waits to be sent';
    const people = body.people.map(({ person }) => person.name).join(', ') || by.name;
    return [
      { run: id, unit: params.number, script: body.script.name, state, done, of: null, place: '', by: by.name, people, since: madeAt },
    ];
  });
}

async function table(runs: readonly ListedRun[], { stdout }: Context): Promise<string[]> {
  const { ink } = await stdout.style();
  const width = Math.max(...runs.map(({ script }) => widthOf(script)));
  return runs.flatMap(({ run, unit, script, state, place, people, since, damage }) => [
    `${ink.bold(unitLabel(unit))}  ${padRight(script, width)}  ${[place, state].filter(Boolean).join(', ')}`,
    `          ${people}, since ${dayText(since)} ${timeText(since)}`,
    `          ${run}`,
    ...(damage ? [`          line ${damage.line} of its journal is damaged: ${damage.reason}`] : []),
  ]);
}
