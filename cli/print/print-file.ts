import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { printCommand, type PrintOrder } from './print-command.js';

/** What became of an order. `job`: the print queue's own number, where it named one. */
export type Printed = { printed: true; job?: string | undefined; answer: string } | { printed: false; why: string; toDo: string };

/** A print command only puts a file in a queue; a queue on the network may take its time. */
const USUAL_SECONDS = 30;
const MOST_SECONDS = 3600;
/** After this a command that was asked to end is ended. */
const MERCY_MS = 1000;

/** After its end a command's last words are waited for so long: a child that it left behind may keep them open for ever. */
const LAST_WORDS_MS = 1000;

/** Hands a PDF to the system's print command. A print that fails is an answer, never an exception: the file is still there. */
export async function printFile(order: PrintOrder, context: Context): Promise<Printed> {
  const { env, interruption } = context;
  const seconds = secondsToWait(env['REFETTLE_PRINT_SECONDS']);
  const { program, words } = await printCommand(order, env);
  const { execa } = await import('execa');
  // A process group of its own, so that whatever the command starts ends with it.
  const child = execa(program, words, {
    reject: false,
    stdin: 'ignore',
    detached: true,
    cleanup: false,
    extendEnv: false,
    env: { ...env, LC_ALL: 'C.UTF-8' },
  });
  const timers: NodeJS.Timeout[] = [];
  const after = (ms: number, work: () => void): void => void timers.push(setTimeout(work, ms));
  let ended: 'late' | 'stopped' | undefined;
  const end = (why: 'late' | 'stopped'): void => {
    ended ??= why;
    signalGroup(child.pid, 'SIGTERM');
    after(MERCY_MS, () => signalGroup(child.pid, 'SIGKILL'));
  };
  after(seconds * 1000, () => end('late'));
  const stop = (): void => end('stopped');
  interruption.signal.addEventListener('abort', stop);
  // What counts is the command's own end: whatever left its group with the pipes is not waited for.
  child.once('exit', () =>
    after(LAST_WORDS_MS, () => {
      child.stdout.destroy();
      child.stderr.destroy();
    }),
  );
  const result = await interruption.hold(async () => child).finally(() => timers.forEach(clearTimeout));
  interruption.signal.removeEventListener('abort', stop);
  // Whoever of its group did not hear the first word.
  if (ended !== undefined) signalGroup(child.pid, 'SIGKILL');

  const said = oneLine(result.stderr) || oneLine(result.stdout);
  if (ended === 'late')
    return failed(
      `${program} gave no answer in ${seconds} s`,
      'It may be printed all the same: look at the printer before you print it again',
    );
  if (ended === 'stopped') return failed('printing was stopped', 'It may be printed all the same: look at the printer');
  if (result.code === 'ENOENT') return failed(`there is no program ${program} on this machine`, missingRemedy(program));
  if (result.code === 'EACCES') return failed(`${program} may not be run`, 'Make it executable, or put another command in REFETTLE_PRINT');
  if (result.exitCode !== 0) {
    const how = result.exitCode === undefined ? `was ended by ${result.signal ?? 'the system'}` : `ended with ${result.exitCode}`;
    return failed(`${program} ${how}${said === '' ? '' : `: ${said}`}`, "Look at the printer; 'lpstat -t' says what its queue says");
  }
  const answer = oneLine(result.stdout);
  return { printed: true, job: jobOf(answer), answer };
}

const failed = (why: string, toDo: string): Printed => ({ printed: false, why, toDo });

const missingRemedy = (program: string): string =>
  program === 'lp'
    ? 'Install it (apt-get install cups-client), or name another print command in REFETTLE_PRINT'
    : 'Correct REFETTLE_PRINT, or leave it out to print with lp';

/** `request id is bench-label-17 (1 file(s))`: what lp of CUPS answers. */
const jobOf = (answer: string): string | undefined => /request id is (\S+)/.exec(answer)?.[1];

const oneLine = (text: string | undefined): string => (text ?? '').replace(/\s+/g, ' ').trim().slice(0, 300);

function signalGroup(pid: number | undefined, signal: 'SIGTERM' | 'SIGKILL'): void {
  if (pid === undefined) return;
  try {
    process.kill(-pid, signal);
  } catch {
    // It has ended by itself.
  }
}

function secondsToWait(text: string | undefined): number {
  if (!text) return USUAL_SECONDS;
  const seconds = /^\d+(\.\d+)?$/.test(text) ? Number(text) : NaN;
  if (!(seconds > 0 && seconds <= MOST_SECONDS))
    throw new UsageError(`REFETTLE_PRINT_SECONDS: '${text}' is no time to wait. Write seconds, like 60.`);
  return seconds;
}
