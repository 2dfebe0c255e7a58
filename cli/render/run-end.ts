import type { UnitPage } from '../../shared/api/units.js';
import { countingEvents } from '../../shared/readiness/facts.js';
import { readiness } from '../../shared/readiness/readiness.js';
import { stageOf } from '../../shared/readiness/stage.js';
import type { StepResult } from '../../shared/script/run-log.js';
import type { Script } from '../../shared/script/schema.js';
import type { Verdict } from '../../shared/verdict.js';
import { unitPage, type UnitOnBench } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { ServerError } from '../errors.js';
import type { Delivery } from '../journal/deliver.js';
import type { RunStop } from '../journal/run-journal.js';
import { spread } from './columns.js';
import { stepLines } from './step-lines.js';
import { blankTagLines } from './tag-box.js';
import { verdictText } from './verdict.js';
import { durationText, plural, unitLabel, unitNumberText } from './words.js';

interface RunEnded {
  unit: UnitOnBench;
  script: Script;
  results: readonly StepResult[];
  verdict: Verdict;
  /** Undefined: it was left before its end and stays on this bench. */
  delivery?: Delivery;
  left?: RunStop['how'];
  code: number;
  tookMs: number;
}

/** The last words of a run: the steps where they were not on this screen already, the tag after a proof run, the verdict, what became of it. */
export async function printRunEnd(
  context: Context,
  { unit, script, results, verdict, delivery, left, code, tookMs }: RunEnded,
): Promise<void> {
  const { stdout, stderr } = context;
  const style = await stdout.style();
  const lines: string[] = [];
  if (!(stdout.isTerminal && stderr.isTerminal)) {
    lines.push(
      `${style.ink.bold(unitLabel(unit.page.unit.number))}  ${unit.page.unit.plate.maker} ${unit.page.unit.plate.model}  ${script.name}`,
    );
    lines.push(...results.flatMap((result, index) => stepLines(index + 1, result, style)));
  }
  if (script.prove && delivery) lines.push('', ...blankTagLines(await standingNow(context, unit, delivery), style));
  const nothing =
    verdict === 'inconclusive' && !results.some(({ kind }) => ['measure', 'inspect', 'expect', 'watch'].includes(kind))
      ? ' (nothing was judged)'
      : '';
  const sent = delivery?.state === 'sent' ? 'Written down here, and sent.' : 'Written down here; not sent yet.';
  if (!delivery) {
    const unitText = unitNumberText(unit.page.unit.number);
    const done = new Set(results.filter(({ kind }) => kind !== 'cut').map(({ stepId }) => stepId)).size;
    const how = left === 'parked' ? 'Parked' : left === 'instrument failed' ? 'Stopped for an instrument' : 'Stopped';
    lines.push(
      '',
      spread(
        ` ${how} after ${done} of ${plural(script.steps.length, 'step')}. What was recorded is kept on this bench.`,
        `exit ${code}`,
        style.columns - 1,
      ),
      // By its unit: an id is too long to type.
      ` Go on: refettle resume ${unitText}`,
      ` Close: refettle abandon ${unitText} --reason TEXT`,
    );
    stdout.write(`${lines.join('\n')}\n`);
    return;
  }
  lines.push(
    '',
    spread(` Ended ${verdictText(verdict, style)}${nothing}, ${durationText(tookMs)}. ${sent}`, `exit ${code}`, style.columns - 1),
  );
  stdout.write(`${lines.join('\n')}\n`);
}

/** The unit's standing with this run on the books; by the bench's own knowledge where the server doesn't have it yet. */
async function standingNow(
  context: Context,
  unit: UnitOnBench,
  delivery: Delivery,
): Promise<Pick<UnitPage, 'unit' | 'stage' | 'readiness'>> {
  if (delivery.state === 'sent') {
    try {
      return (await unitPage(context, unit.page.unit.number)).value;
    } catch (error) {
      if (!(error instanceof ServerError)) throw error;
    }
  }
  return { unit: unit.page.unit, stage: stageOf(countingEvents(unit.facts)), readiness: readiness(unit.facts) };
}
