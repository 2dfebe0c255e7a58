import { runVerdict, stepVerdict } from '../../shared/script/run-verdict.js';
import type { Script } from '../../shared/script/schema.js';
import type { Verdict } from '../../shared/verdict.js';
import { readScript, refuseFindings, textOf } from '../bench/read-script.js';
import { runScript, type RunEnd } from '../bench/run-script.js';
import { simulatedTechnician } from '../bench/simulated-technician.js';
import type { Technician } from '../bench/technician.js';
import { terminalTechnician } from '../bench/terminal-technician.js';
import { unitOnBench, type UnitOnBench } from '../bench/unit-on-bench.js';
import { sinceOpened } from '../../shared/readiness/facts.js';
import type { Context } from '../context.js';
import { NobodyToAskError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import type { OpenRig } from '../instruments/rig.js';
import { sendWaiting, type Delivery } from '../journal/deliver.js';
import { closeRun, recoverRuns } from '../journal/recover-runs.js';
import { RunJournal, writtenRun } from '../journal/run-journal.js';
import { printJson } from '../render/json.js';
import { cut, spread, widthOf } from '../render/columns.js';
import { deliveryWords } from '../render/delivery-words.js';
import { printRunEnd } from '../render/run-end.js';
import { unitLabel } from '../render/words.js';

export interface RunOptions {
  script: string;
  number: number;
  rig?: string | undefined;
  unattended?: boolean | undefined;
  json?: boolean | undefined;
}

/** Runs a bench script on a unit. What it recorded is on this bench's disk, whatever happens, and goes to the server. */
export async function runScriptCommand(options: RunOptions, context: Context): Promise<number> {
  const scriptText = textOf(options.script, 'bench script');
  const script = readScript(scriptText, options.script);
  recoverRuns(context);
  const unit = await unitOnBench(context, options.number);
  refuseFindings(script, unit.sheet, options.script);
  if (unit.page.unit.licensedOnly) {
    context.stderr.say(
      `${unitLabel(options.number)} is for a licensed person only (gas, sealed refrigerant or a microwave oven): no script runs on it.`,
    );
    return EXIT.notGood;
  }
  const rig = await context.openRig(options.rig);
  try {
    const technician = technicianFor(options, context, rig, script, unit.me.shop.currency);
    if (rig.simulated && sinceOpened(unit.facts.events).some((event) => event.kind === 'repair')) rig.hands?.repaired();
    return await context.interruption.hold(() => runAndSend(options, context, { unit, script, scriptText, rig, technician }));
  } finally {
    await rig.close();
  }
}

/** Who answers. Nobody answers a caution of a real machine for a person: such a run ends before a port is opened. */
function technicianFor(options: RunOptions, context: Context, rig: OpenRig, script: Script, currency: string): Technician {
  const attended = context.interactive && options.unattended !== true;
  if (attended) return terminalTechnician(context, currency);
  if (rig.hands) return simulatedTechnician(context, rig.hands);
  const asks = script.steps.find((step) => step.kind === 'caution') ?? script.steps.find((step) => step.kind !== 'expect');
  if (asks)
    throw new NobodyToAskError(
      `Step '${asks.id}' (${asks.title}) waits for a person. Nothing was begun, no port was opened.`,
      'run it at a terminal and without --unattended',
    );
  return terminalTechnician(context, currency);
}

async function runAndSend(
  options: RunOptions,
  context: Context,
  parts: { unit: UnitOnBench; script: Script; scriptText: string; rig: OpenRig; technician: Technician },
): Promise<number> {
  const { unit, script, scriptText, rig } = parts;
  const startedAt = context.now();
  const { name, title, prove } = script;
  const journal = new RunJournal(context.home, {
    id: context.newId(),
    server: context.server,
    unit: options.number,
    by: unit.by,
    script: { name, title, prove, text: scriptText },
    rig: { name: rig.name, simulated: rig.simulated },
    startedAt: startedAt.toISOString(),
    pid: process.pid,
  });
  await printHeader(context, unit, script, rig);
  let end: RunEnd | undefined;
  let fault: Error | undefined;
  try {
    end = await runScript({ context, journal, ...parts });
  } catch (error) {
    fault = error instanceof Error ? error : new Error(String(error));
  }
  await rig.close();
  const results = end?.results ?? [];
  const interrupted = end?.interrupted ?? true;
  const endedAt = context.now();
  journal.end(endedAt.toISOString(), interrupted);
  journal.close();
  const entry = closeRun(context, writtenRun(context.home, journal.header.id));
  // A fault of ours, a full disk: what was recorded is in the outbox; sending it is not tried on top of that.
  if (fault) throw fault;

  const delivery = (await sendWaiting(context)).find((one) => one.entry.id === entry.id) ?? {
    state: 'waits',
    entry,
    why: 'it is being sent by another terminal',
  };
  const verdict = runVerdict(results, interrupted);
  const code = firstExitCode([end?.exitCode ?? EXIT.good, codeOf(verdict), delivery.state === 'sent' ? EXIT.good : EXIT.server]);
  await say(options, context, {
    unit,
    script,
    results,
    verdict,
    delivery,
    code,
    tookMs: endedAt.getTime() - startedAt.getTime(),
    runId: entry.id,
  });
  return code;
}

const codeOf = (verdict: Verdict): number => (verdict === 'pass' ? EXIT.good : EXIT.notGood);

async function printHeader({ stderr }: Context, { page, sheet, me }: UnitOnBench, script: Script, rig: OpenRig): Promise<void> {
  const { ink, columns } = await stderr.style();
  const { number, plate } = page.unit;
  const left = `${ink.bold(unitLabel(number))}  ${plate.maker} ${plate.model}  ${sheet.title ?? sheet.family}`;
  const about = `${script.name}, ${script.steps.length} steps`;
  const whole = spread(left, `${about}   ${rig.name}, ${me.user.name}`, columns - 1);
  stderr.say(`${widthOf(whole) < columns ? whole : cut(spread(left, about, columns - 1), columns - 1)}\n${'─'.repeat(columns - 1)}`);
}

interface Said {
  unit: UnitOnBench;
  script: Script;
  results: RunEnd['results'];
  verdict: Verdict;
  delivery: Delivery;
  code: number;
  tookMs: number;
  runId: string;
}

async function say(options: RunOptions, context: Context, said: Said): Promise<void> {
  const { delivery, results, verdict } = said;
  if (delivery.state !== 'sent') context.stderr.say(deliveryWords(delivery));
  if (options.json === true) {
    printJson(context, {
      run: said.runId,
      unit: options.number,
      script: said.script.name,
      verdict,
      sent: delivery.state === 'sent',
      steps: results.map((result) => ({ id: result.stepId, kind: result.kind, title: result.title, verdict: stepVerdict(result) ?? null })),
    });
    return;
  }
  await printRunEnd(context, said);
}
