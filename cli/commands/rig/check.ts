import { basename } from 'node:path';
import { readSheet } from '../../../shared/sheet/read-sheet.js';
import type { Sheet } from '../../../shared/sheet/schema.js';
import { watchLevels } from '../../bench/level-watch.js';
import { textOf } from '../../bench/read-script.js';
import { findSensorOrder } from '../../bench/sensor-check.js';
import type { Context } from '../../context.js';
import { UsageError } from '../../errors.js';
import { EXIT } from '../../exit-codes.js';
import { readIfThere, writeWhole } from '../../home.js';
import { askPort, type PortAnswer } from '../../instruments/ask-port.js';
import { METER_BAUD_RATE, PROBE_BAUD_RATE, usualBaudRate } from '../../instruments/assemble-rig.js';
import { openLightProbe } from '../../instruments/light-probe.js';
import { machinePorts, type MachinePort } from '../../instruments/machine-ports.js';
import { parseRig, RIG_FILE, type Rig, type RigInstrument, type RigProbe } from '../../instruments/rig-file.js';
import { SIMULATED_PREFIX } from '../../instruments/rig.js';
import { openTransport, type Binding } from '../../instruments/transport.js';
import { rigText } from '../../instruments/write-rig.js';
import { printJson } from '../../render/json.js';
import { askMeter } from './ask-accuracy.js';
import { checkLines } from './check-lines.js';
import { foundAs, matchInstruments, type Found, type Matched, type Unclear } from './match-instruments.js';

export interface RigCheckOptions {
  port?: string[];
  sheet?: string;
  family?: string;
  name?: string;
  rig?: string;
  write?: boolean;
  json?: boolean;
}

/** The machine whose ports are looked at; a test hands in its own. */
export interface Machine {
  ports(): Promise<MachinePort[]>;
  /** The real driver unless given. */
  binding?: Binding;
  askTimeoutMs?: number;
}

const YES_NO = [
  { key: 'y', word: 'yes' },
  { key: 'n', word: 'no' },
] as const;

/**
 * Walks through the ports of this machine, says what each answered or why not, finds which sensor looks at which lamp, and writes the rig
 * file. Without somebody at a terminal it reports, and writes only with `--write`.
 */
export async function runRigCheck(
  options: RigCheckOptions,
  context: Context,
  machine: Machine = { ports: () => machinePorts() },
): Promise<number> {
  if (options.rig?.startsWith(SIMULATED_PREFIX) === true)
    throw new UsageError(`--rig ${options.rig}: simulated instruments hang on no port. refettle rig show --rig ${options.rig} lists them`);
  const { home, stderr } = context;
  const file = options.rig ?? home.path(RIG_FILE);
  const text = readIfThere(file);
  const written = text === undefined ? undefined : parseRig(text, file);
  const sheet = await sheetOf(options, context);
  const rig = { ...(written ?? emptyRig(options.name ?? 'bench')), ...(options.name === undefined ? {} : { name: options.name }) };

  const ports = options.port?.length ? options.port.map((path) => ({ path })) : await machine.ports();
  const answers: PortAnswer[] = [];
  for (const { path } of ports) {
    if (context.interruption.interrupted) break;
    if (context.interactive) stderr.say(`Asking ${path} …`);
    answers.push(await askPort(path, { baudRates: baudRatesFor(path, rig), binding: machine.binding, timeoutMs: machine.askTimeoutMs }));
  }
  const matched = matchInstruments(rig, answers);
  if (options.json !== true) {
    const style = await context.stdout.style();
    context.stdout.write(`${checkLines({ answers, matched, file: text === undefined ? undefined : file }, style).join('\n')}\n`);
  }

  const { found, unclear, missing } = context.interactive ? await askWhich(matched, rig, context) : matched;
  const asked = context.interactive ? await askAll(found, sheet, rig, context, machine) : found;
  const anything = asked.length + unclear.length > 0;
  // What may be one of several is not guessed, and a file without it would be wrong: nothing is proposed then.
  const nextText =
    unclear.length > 0
      ? undefined
      : rigText({ ...rig, instruments: [...asked.map(({ instrument }) => instrument), ...missing].sort(byOrderOf(rig)) });
  const next = nextText === undefined ? undefined : readable(nextText, file, context);
  const differs = next === undefined || (written === undefined ? anything : JSON.stringify(next) !== JSON.stringify(written));
  const kept =
    nextText !== undefined && differs && (await mayWrite(options, context, file, nextText))
      ? write(file, text, nextText, context)
      : undefined;

  const complete = missing.length === 0 && anything;
  const open = differs && kept === undefined;
  if (options.json === true)
    printJson(context, {
      ports: answers,
      instruments: asked.map(({ instrument, standing }) => ({ ...instrument, standing })),
      unclear: unclear.map(({ answer: { port, identification }, candidates }) => ({
        port,
        identification,
        candidates: candidates.map(({ id }) => id),
      })),
      missing,
      rigFile: file,
      differs,
      written: kept !== undefined,
      ...(kept?.backup === undefined ? {} : { backup: kept.backup }),
      ...(open && nextText !== undefined ? { proposal: nextText } : {}),
    });
  else sayEnd({ file, differs, kept, complete, anything, unclear }, context);
  if (!complete) return EXIT.instrument;
  return open && (unclear.length > 0 || asked.some(({ standing }) => standing === 'moved' || standing === 'new'))
    ? EXIT.notGood
    : EXIT.good;
}

/** What is to be written must be a rig file. Where it is none, what was typed is shown before it is refused. */
function readable(text: string, file: string, { stderr }: Context): Rig {
  try {
    return parseRig(text, file);
  } catch (error) {
    stderr.write(`\n${text}\n`);
    stderr.say('Nothing was written; what would have been stands above.');
    throw error;
  }
}

/** Asks which of the rig file's instruments it is that answers, where several may be meant. */
async function askWhich(matched: Matched, rig: Rig, { prompt, stderr }: Context): Promise<Matched> {
  const found = [...matched.found];
  const free = new Set(matched.unclear.flatMap(({ candidates }) => candidates));
  const ids = new Set([...rig.instruments, ...found.map(({ instrument }) => instrument)].map(({ id }) => id));
  for (const { answer, candidates } of matched.unclear) {
    const left = candidates.filter((one) => free.has(one));
    const choices = left.map(({ id, port }) => ({ value: id, name: `${id}, which the rig file has on ${port}` }));
    if (left.length > 0) stderr.say(`${answer.identification} says no serial number. Look which one hangs on ${answer.port}.`);
    const id =
      left.length === 0
        ? A_NEW_ONE
        : await prompt.choice({
            message: `Which one is on ${answer.port}?`,
            choices: [...choices, { value: A_NEW_ONE, name: 'none of these: a new one' }],
            instead: 'run it at a terminal',
          });
    const chosen = left.find((one) => one.id === id);
    if (chosen) free.delete(chosen);
    found.push(foundAs(chosen, answer, ids));
  }
  return { found, unclear: [], missing: [...matched.missing, ...free] };
}

const A_NEW_ONE = '';

/** What a rig file says where there is none yet. */
const emptyRig = (name: string): Rig => parseRig(JSON.stringify({ format: 'refettle.rig', version: 1, name, instruments: [] }), RIG_FILE);

async function sheetOf({ sheet, family }: RigCheckOptions, context: Context): Promise<Sheet | undefined> {
  if (sheet !== undefined && family !== undefined) throw new UsageError('--sheet and --family: give one of them');
  if (sheet !== undefined) return readSheet(textOf(sheet, 'service sheet'), sheet);
  if (family === undefined) return undefined;
  return readSheet((await (await context.api()).call('getSheet', { params: { family } })).text, family);
}

/** The speed that the rig file has for a port first, then the usual ones, then whatever else the rig uses. */
function baudRatesFor(path: string, { instruments }: Rig): number[] {
  const here = instruments.filter(({ port }) => port === path).map((one) => one.baudRate ?? usualBaudRate(one));
  const elsewhere = instruments.flatMap(({ baudRate }) => baudRate ?? []);
  return [...new Set([...here, PROBE_BAUD_RATE, METER_BAUD_RATE, ...elsewhere])];
}

/** The file's order stays; what is new stands at its end. */
function byOrderOf({ instruments }: Rig): (one: RigInstrument, other: RigInstrument) => number {
  const place = ({ id }: RigInstrument): number => {
    const index = instruments.findIndex((known) => known.id === id);
    return index < 0 ? instruments.length : index;
  };
  return (one, other) => place(one) - place(other);
}

/** Goes through what was found with the technician: the sensors of the probe, the accuracies of the meters. */
async function askAll(found: readonly Found[], sheet: Sheet | undefined, rig: Rig, context: Context, machine: Machine): Promise<Found[]> {
  const { prompt, stderr } = context;
  const instead = 'run it at a terminal';
  const asked: Found[] = [];
  /** The names that others have. */
  const taken = (one: Found): string[] => [
    ...rig.instruments.map(({ id }) => id).filter((id) => id !== one.before?.id),
    ...found.filter((other) => other !== one).map(({ instrument }) => instrument.id),
    ...asked.map(({ instrument }) => instrument.id),
  ];
  for (const one of found) {
    const { instrument } = one;
    if (instrument.kind === 'light-probe') {
      if (sheet === undefined) {
        stderr.say(
          `${instrument.id}: which sensor looks at which lamp is not checked; give the panel with --sheet FILE or --family FAMILY.`,
        );
        asked.push(one);
      } else asked.push({ ...one, instrument: await withSensors(instrument, one, sheet, rig, context, machine) });
    } else if (Object.keys(instrument.accuracy).length > 0) {
      const keys = [...YES_NO];
      const message = `${instrument.id}: keep the accuracies of the rig file?`;
      asked.push(
        (await prompt.key({ message, keys, instead })) === 'y'
          ? one
          : { ...one, instrument: await askMeter(context, instrument, taken(one)) },
      );
    } else asked.push({ ...one, instrument: await askMeter(context, instrument, taken(one)) });
  }
  return asked;
}

async function withSensors(
  probe: RigProbe,
  { answer }: Found,
  sheet: Sheet,
  rig: Rig,
  context: Context,
  machine: Machine,
): Promise<RigProbe> {
  const { prompt, stderr } = context;
  const lamps = sheet.lamps.map(({ id, label }) => ({ id, label }));
  const message = `${probe.id}: find which sensor looks at which of the ${lamps.length} lamps, with a hand?`;
  if ((await prompt.key({ message, keys: YES_NO, instead: 'run it at a terminal' })) === 'n') return probe;
  stderr.say('The machine stays dark for this. Cover one sensor after another, in panel order.');
  const { port, baudRate } = answer;
  const transport = await openTransport({ instrument: probe.id, path: port, baudRate, binding: machine.binding });
  try {
    const nowUs = (): number => performance.now() * 1000;
    const open = await openLightProbe(transport, { sampleRateHz: rig.sampleRateHz, scaleMax: rig.scaleMax, nowUs });
    const watch = watchLevels(context, open, { columns: open.sensorCount, scaleMax: rig.scaleMax });
    try {
      return { ...probe, sensors: await findSensorOrder(context, watch, lamps, open.sensorCount) };
    } finally {
      await watch.close();
    }
  } finally {
    await transport.close();
  }
}

/** The new file is shown first. Without a terminal only `--write` writes. */
async function mayWrite({ write: told }: RigCheckOptions, context: Context, file: string, text: string): Promise<boolean> {
  if (!context.interactive) return told === true;
  context.stderr.write(`\n${text}\n`);
  if (told === true) return true;
  return (await context.prompt.key({ message: `Write this to ${file}?`, keys: YES_NO, instead: 'give --write' })) === 'y';
}

/** Writes the rig file; the old one stays beside it. */
function write(file: string, old: string | undefined, text: string, context: Context): { backup?: string } {
  const backup = old === undefined ? undefined : `${file.replace(/\.ya?ml$/, '')}.${context.now().toISOString().replaceAll(':', '-')}.yaml`;
  if (backup !== undefined && old !== undefined) writeWhole(backup, old);
  writeWhole(file, text);
  return backup === undefined ? {} : { backup };
}

interface End {
  file: string;
  differs: boolean;
  kept: { backup?: string } | undefined;
  complete: boolean;
  anything: boolean;
  unclear: readonly Unclear[];
}

function sayEnd({ file, differs, kept, complete, anything, unclear }: End, { stdout, stderr, interactive }: Context): void {
  if (kept) {
    const old = kept.backup === undefined ? '' : ` The old one is kept as ${basename(kept.backup)}.`;
    stdout.write(`Written: ${file}.${old}\n`);
  } else if (unclear.length > 0)
    stderr.say(
      `Nothing was written: ${unclear.map(({ answer, candidates }) => `what answers on ${answer.port} may be ${candidates.map(({ id }) => id).join(' or ')}`).join('; ')}. Run refettle rig check at a terminal and say which, or plug each where the rig file has it.`,
    );
  else if (differs)
    stderr.say(`Nothing was written. To let the rig file follow: refettle rig check ${interactive ? '' : '--write'}`.trim());
  else if (complete) stdout.write(`${file} says it as it is.\n`);
  if (!anything)
    stderr.say('No instrument answered on any port. Switch them on, see that they are plugged in, or name a port with --port.');
}
