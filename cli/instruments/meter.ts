import type { MeasuredCheck } from '../../shared/sheet/schema.js';
import { parseScpiNumber } from '../../shared/measure/scpi-value.js';
import { GarbageError, InstrumentRefusalError, InstrumentTimeoutError, NotANumberError, OverloadError } from './instrument-error.js';
import { isSampleLine } from './sample-line.js';
import { ScpiConversation } from './scpi-conversation.js';
import type { Transport } from './transport.js';

export type Quantity = MeasuredCheck['quantity'];

/** What is sent for each quantity, and the unit the answer comes in (SCPI-99 volume 2, MEASure). */
export const MEASURE_COMMANDS: Readonly<Record<Quantity, { query: string; unit: string }>> = {
  resistance: { query: 'MEASure:RESistance?', unit: 'ohm' },
  'insulation resistance': { query: 'MEASure:RESistance?', unit: 'ohm' },
  'voltage ac': { query: 'MEASure:VOLTage:AC?', unit: 'V' },
  'voltage dc': { query: 'MEASure:VOLTage:DC?', unit: 'V' },
  'current ac': { query: 'MEASure:CURRent:AC?', unit: 'A' },
  capacitance: { query: 'MEASure:CAPacitance?', unit: 'F' },
  temperature: { query: 'MEASure:TEMPerature?', unit: 'degC' },
};

/** A measurement takes its time: autoranging, and the charging of an insulation under test. */
export const MEASURE_TIMEOUT_MS = 8000;

export interface MeterOptions {
  measureTimeoutMs?: number | undefined;
  /** A number of the meter's own for overload, in its base unit, where it has one below SCPI's. */
  overloadFrom?: ((quantity: Quantity) => number | undefined) | undefined;
}

export interface ScpiMeter {
  /** As the meter answered `*IDN?`. */
  readonly identification: string;
  /** One measurement in the meter's base unit; with `once` it is not asked for again where two answers differ. Throws an InstrumentError of its own class for everything that is no reading. */
  measure(quantity: Quantity, options?: { once?: boolean }): Promise<{ value: number; raw: string }>;
  close(): Promise<void>;
}

/** Falls into step with a meter and asks who it is. */
export async function openMeter(transport: Transport, options: MeterOptions = {}): Promise<ScpiMeter> {
  // A light probe that hangs here by mistake may be sending: its samples are no answers.
  const conversation = new ScpiConversation(transport, { passOver: isSampleLine });
  const { text: identification } = await conversation.identify();
  return {
    identification,
    async measure(quantity, { once = false } = {}) {
      const { query } = MEASURE_COMMANDS[quantity];
      const timeoutMs = options.measureTimeoutMs ?? MEASURE_TIMEOUT_MS;
      const raw = await askOrExplain(conversation, transport, query, { timeoutMs, once });
      const number = parseScpiNumber(raw, { overloadFrom: options.overloadFrom?.(quantity) });
      if (number.kind === 'value') return { value: number.value, raw };
      if (number.kind === 'overload') throw new OverloadError(transport, number.sign);
      if (number.kind === 'not-a-number') throw new NotANumberError(transport);
      conversation.doubt();
      throw new GarbageError(transport, query, raw);
    },
    close: () => transport.close(),
  };
}

/** A meter that does not know a command is silent; its error queue then says why. A late answer is never waited for: it is passed over. */
async function askOrExplain(
  conversation: ScpiConversation,
  transport: Transport,
  query: string,
  asking: { timeoutMs: number; once: boolean },
): Promise<string> {
  try {
    return await conversation.askSurely(query, asking);
  } catch (error) {
    if (!(error instanceof InstrumentTimeoutError)) throw error;
    const [refusal] = await conversation.errors().catch(() => []);
    throw refusal === undefined ? error : new InstrumentRefusalError(transport, query, refusal);
  }
}
