import type { PersonRef } from '../shared/history/events.js';
import type { Api } from './api/api-client.js';
import { homeOf, type Environment, type Home } from './home.js';
import type { OpenRig } from './instruments/rig.js';
import { joinedServer } from './joined-server.js';
import { Interruption } from './interruption.js';
import { newId } from './new-id.js';
import { outputOn, type Output, type RawOutput } from './output.js';
import type { InputStream, Prompt } from './prompt.js';

/** Where the server is unless told (contract, section 8: HOST and PORT of a fresh start). */
const USUAL_SERVER = 'http://127.0.0.1:4780';

/** Everything a command works with; nothing else is reached for, so that a test can hand in its own. */
export interface Context {
  readonly env: Environment;
  readonly home: Home;
  /** The server's address, without a slash at its end. */
  readonly server: string;
  readonly stdin: InputStream;
  readonly stdout: Output;
  readonly stderr: Output;
  /** Somebody sits at a terminal and can be asked. */
  readonly interactive: boolean;
  readonly prompt: Prompt;
  readonly interruption: Interruption;
  /** The same bench and terminal for a command that the menu runs, with a Ctrl-C of its own. */
  forCommand(): Context;
  now(): Date;
  newId(): string;
  /** Waits in real time. */
  sleep(milliseconds: number): Promise<void>;
  openRig(choice: string | undefined): Promise<OpenRig>;
  /** The server's API, with the token of who is signed in; on a shared bench with the bench's, for who stands there or for `as`. */
  api(as?: Pick<PersonRef, 'id'>): Promise<Api>;
}

export interface ContextParts {
  env: Environment;
  stdin: InputStream;
  stdout: RawOutput;
  stderr: RawOutput;
  /** The second Ctrl-C, or one while nothing is being recorded. */
  leaveNow: () => void;
  /** A command that the menu runs: the first Ctrl-C only ends it. */
  inMenu?: boolean;
}

export function createContext(parts: ContextParts): Context {
  const { env, stdin, stdout, stderr, leaveNow, inMenu = false } = parts;
  const home = homeOf(env);
  const server = (env['REFETTLE_SERVER'] || joinedServer(home) || USUAL_SERVER).replace(/\/+$/, '');
  const interruption = new Interruption(leaveNow, { firstOnlyEnds: inMenu });
  const errors = outputOn(stderr, env);
  const interactive = stdin.isTTY === true;
  const now = (): Date => new Date();
  const prompt = async (): Promise<Prompt> =>
    (await import('./prompt.js')).promptOn({ stdin, output: errors, rawOutput: stderr, interactive, interruption, now });
  const context: Context = {
    env,
    home,
    server,
    stdin,
    stdout: outputOn(stdout, env),
    stderr: errors,
    interactive,
    prompt: {
      key: async (question) => (await prompt()).key(question),
      text: async (question) => (await prompt()).text(question),
      secret: async (question) => (await prompt()).secret(question),
      choice: async (question) => (await prompt()).choice(question),
      pick: async (question) => (await prompt()).pick(question),
    },
    interruption,
    forCommand: () => createContext({ ...parts, inMenu: true }),
    now,
    newId,
    sleep: (milliseconds) => new Promise((resolve) => setTimeout(resolve, milliseconds)),
    openRig: async (choice) =>
      (await import('./instruments/rig.js')).openRig(choice, home.folder, { say: (line) => errors.say(line), signal: interruption.signal }),
    api: async (as) => {
      const [{ createApi }, { readSession }, { joinedBench }, { standingHere }] = await Promise.all([
        import('./api/api-client.js'),
        import('./session.js'),
        import('./bench/joined-bench.js'),
        import('./bench/kept-sign-on.js'),
      ]);
      // After Ctrl-C what was recorded is still sent; the second Ctrl-C leaves at once.
      const signal = interruption.interrupted ? undefined : interruption.signal;
      const joined = joinedBench(home, server);
      if (!joined) return createApi({ server, token: () => readSession(home, server)?.token, signal });
      const bench = {
        person: () => (as ?? standingHere(context, joined.bench.id))?.id,
        remedy: 'A lead or an admin gives the bench a new token, then: refettle bench join',
      };
      return createApi({ server, token: () => joined.token, bench, signal });
    },
  };
  return context;
}
