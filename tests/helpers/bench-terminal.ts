// A bench with its own folder and streams that a test reads and types into. Nothing of ours is replaced: only the terminal is made up.
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { PassThrough, Writable } from 'node:stream';
import { createContext, type Context } from '../../cli/context.js';
import { keepSession } from '../../cli/session.js';

export interface BenchTerminal {
  context: Context;
  home: string;
  stdout(): string;
  stderr(): string;
  /** Presses keys as soon as standard error says this; in the order given, each once. */
  when(says: string, press: string): BenchTerminal;
  /** How often the terminal was put into raw mode, less how often it was given back. */
  raw(): number;
  /** How often the program wanted to leave at once. */
  left(): number;
  remove(): void;
}

export interface BenchTerminalOptions {
  /** Somebody sits there: standard input and error are a terminal. */
  terminal?: boolean;
  /** Standard output is one too. */
  stdoutTerminal?: boolean;
  env?: Record<string, string>;
  home?: string;
}

export function benchTerminal({
  terminal = false,
  stdoutTerminal = terminal,
  env = {},
  home = mkdtempSync(join(tmpdir(), 'refettle-bench-')),
}: BenchTerminalOptions = {}): BenchTerminal {
  const waiting: { says: string; press: string }[] = [];
  const written = { stdout: '', stderr: '', heard: 0 };
  let raw = 0;
  let left = 0;
  const stdin = Object.assign(new PassThrough(), { isTTY: terminal, setRawMode: (on: boolean) => (raw += on ? 1 : -1) });
  const answer = (): void => {
    const next = waiting[0];
    const at = next ? written.stderr.indexOf(next.says, written.heard) : -1;
    if (!next || at < 0) return;
    written.heard = at + next.says.length;
    waiting.shift();
    setImmediate(() => {
      stdin.write(next.press);
      answer();
    });
  };
  // A stream like a terminal's, because inquirer draws its prompts on it.
  const stderr = Object.assign(
    new Writable({
      decodeStrings: false,
      write(text: string | Buffer, _encoding, done) {
        written.stderr += text.toString();
        answer();
        done();
      },
    }),
    { isTTY: terminal, columns: 80, rows: 24 },
  );
  // Nor can a terminal's be ended: inquirer ends what it has drawn on, after each prompt.
  stderr.end = () => stderr;
  const context = createContext({
    env: { LANG: 'C.UTF-8', NO_COLOR: '1', REFETTLE_HOME: home, REFETTLE_SERVER: 'http://127.0.0.1:65534', ...env },
    stdin,
    stdout: { isTTY: stdoutTerminal, columns: 80, rows: 24, write: (text: string) => (written.stdout += text) },
    stderr,
    leaveNow: () => (left += 1),
  });
  const bench: BenchTerminal = {
    context,
    home,
    stdout: () => written.stdout,
    stderr: () => written.stderr,
    when(says, press) {
      waiting.push({ says, press });
      answer();
      return bench;
    },
    raw: () => raw,
    left: () => left,
    remove: () => rmSync(home, { recursive: true, force: true }),
  };
  return bench;
}

/** Somebody has signed in on this bench. */
export function signedIn(
  bench: BenchTerminal,
  user: { id: string; name: string; email: string; role: 'technician' | 'lead' | 'sales' | 'admin'; token: string },
): void {
  const { token, ...rest } = user;
  keepSession(bench.context.home, { server: bench.context.server, token, user: rest });
}
