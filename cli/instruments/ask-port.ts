import {
  HalfAnswerError,
  InstrumentError,
  InstrumentRefusalError,
  InstrumentTimeoutError,
  NoLinesError,
  PermissionError,
  PortBusyError,
  PortMissingError,
  ProbeOrMeterError,
  TwoAnswersError,
  type Where,
} from './instrument-error.js';
import { COUNT_QUERY, sensorCountOf, STOP } from './light-probe.js';
import { isSampleLine } from './sample-line.js';
import { ScpiConversation } from './scpi-conversation.js';
import { openTransport, type Binding } from './transport.js';

/** What a port came to when it was asked who hangs on it. */
export type PortAnswer =
  | { port: string; state: 'answers'; baudRate: number; identification: string; sensorCount?: number }
  | { port: string; state: 'in use' | 'no permission' | 'not there' | 'silent' | 'makes no sense' | 'failed'; why: string; toDo: string };

/** An instrument that does not answer for so long is not there, or speaks at another speed. */
const ASK_TIMEOUT_MS = 700;

export interface AskPortOptions {
  /** The speeds to try, likeliest first. */
  baudRates: readonly number[];
  binding?: Binding | undefined;
  timeoutMs?: number | undefined;
}

/** Asks a port who is there, at one speed after another. Whatever was sending is stopped. The port is closed again. */
export async function askPort(port: string, { baudRates, binding, timeoutMs = ASK_TIMEOUT_MS }: AskPortOptions): Promise<PortAnswer> {
  let nonsense: InstrumentError | undefined;
  for (const baudRate of baudRates) {
    try {
      return await askAt(port, baudRate, binding, timeoutMs);
    } catch (error) {
      if (!(error instanceof InstrumentError)) throw error;
      const state = stateOf(error);
      if (state !== undefined) return { port, state, ...wordsFor(error) };
      if (error.name !== 'InstrumentTimeoutError') nonsense = error;
    }
  }
  const tried = `tried at ${baudRates.join(' and ')} baud`;
  if (nonsense) return { port, state: 'makes no sense', why: `${wordsFor(nonsense).why} (${tried})`, toDo: nonsense.toDo };
  return {
    port,
    state: 'silent',
    why: `nothing answers to *IDN? (${tried})`,
    toDo: 'Switch the instrument on and set it to remote; if it has another speed, write its baudRate into the rig file.',
  };
}

async function askAt(port: string, baudRate: number, binding: Binding | undefined, timeoutMs: number): Promise<PortAnswer> {
  const transport = await openTransport({ instrument: ASKED, path: port, baudRate, binding });
  try {
    const conversation = new ScpiConversation(transport, { timeoutMs, passOver: isSampleLine });
    const { text: identification } = await conversation.identify();
    const sensorCount = await sensorsOf(conversation, transport);
    if (sensorCount !== undefined) await conversation.tell(STOP);
    await conversation.errors();
    return { port, state: 'answers', baudRate, identification, ...(sensorCount === undefined ? {} : { sensorCount }) };
  } finally {
    await transport.close();
  }
}

const ASKED = 'what hangs';

/** A question may get lost on its way, an answer too, and either may come damaged: what an instrument is, is said at least twice. */
const MOST_ASKINGS = 6;
const SAID_TWICE = 2;
const SAYS_NOTHING = [InstrumentTimeoutError, HalfAnswerError, NoLinesError, TwoAnswersError] as const;

/**
 * How many sensors hang there; undefined where it is no probe. A meter refuses the question with an entry in its error queue, which is
 * emptied for it. Silence says nothing of the kind.
 */
async function sensorsOf(conversation: ScpiConversation, where: Where): Promise<number | undefined> {
  const said = new Map<number | 'no probe', number>();
  for (let asking = 1; asking <= MOST_ASKINGS; asking += 1) {
    const saying = await sensorsSaid(conversation);
    if (saying === undefined) continue;
    const often = (said.get(saying) ?? 0) + 1;
    if (often === SAID_TWICE) return saying === 'no probe' ? undefined : saying;
    said.set(saying, often);
  }
  throw new ProbeOrMeterError(where, COUNT_QUERY);
}

async function sensorsSaid(conversation: ScpiConversation): Promise<number | 'no probe' | undefined> {
  try {
    return sensorCountOf(await conversation.askSurely(COUNT_QUERY)) ?? 'no probe';
  } catch (error) {
    if (error instanceof InstrumentRefusalError) return 'no probe';
    if (!SAYS_NOTHING.some((kind) => error instanceof kind)) throw error;
    return (await conversation.errors()).length > 0 ? 'no probe' : undefined;
  }
}

/** The message without whom it is about: nobody knows yet. */
const wordsFor = (error: InstrumentError): { why: string; toDo: string } => ({
  why: error.message.replace(`${error.instrument} on ${error.port}: `, ''),
  toDo: error.toDo,
});

function stateOf(error: InstrumentError): Exclude<PortAnswer['state'], 'answers'> | undefined {
  if (error instanceof PortBusyError) return 'in use';
  if (error instanceof PermissionError) return 'no permission';
  if (error instanceof PortMissingError) return 'not there';
  return error.name === 'InstrumentError' || error.name === 'DisconnectedError' ? 'failed' : undefined;
}
