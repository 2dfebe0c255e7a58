import {
  GarbageError,
  HalfAnswerError,
  InstrumentError,
  InstrumentTimeoutError,
  NoLinesError,
  WrongInstrumentError,
} from './instrument-error.js';
import { isSameInstrument } from './identity.js';
import type { RigInstrument } from './rig-file.js';
import type { Transport } from './transport.js';

interface Instrument {
  readonly identification: string;
  close(): Promise<void>;
}

export interface OpenInstrumentsParts {
  instruments: readonly RigInstrument[];
  openPort: (instrument: RigInstrument, port: string) => Promise<Transport>;
  /** Lines for people. */
  say: (line: string) => void;
}

/** Instruments that are open, by id. One that failed to open or lost its port is forgotten, so that the next try opens it afresh. */
export class OpenInstruments {
  readonly #parts: OpenInstrumentsParts;
  readonly #open = new Map<string, Promise<Instrument>>();
  /** On which port each instrument hangs: as the rig file says, until it is found elsewhere. */
  readonly #ports: Map<string, string>;
  /** What has answered on its port before is only looked for elsewhere when another answers there. */
  readonly #met = new Set<string>();

  constructor(parts: OpenInstrumentsParts) {
    this.#parts = parts;
    this.#ports = new Map(parts.instruments.map(({ id, port }) => [id, port]));
  }

  async open<T extends Instrument>(instrument: RigInstrument, greet: (transport: Transport) => Promise<T>): Promise<T> {
    const { id } = instrument;
    const known = this.#open.get(id);
    // An id is always greeted in the same way: a probe as a probe, a meter as a meter.
    if (known) return known as Promise<T>;
    const opening = this.#find(instrument, greet);
    this.#open.set(id, opening);
    opening.catch(() => this.#open.delete(id));
    return opening;
  }

  async close(id: string): Promise<void> {
    const opening = this.#open.get(id);
    this.#open.delete(id);
    await opening?.then((instrument) => instrument.close()).catch(() => undefined);
  }

  async closeAll(): Promise<void> {
    await Promise.all([...this.#open.keys()].map((id) => this.close(id)));
  }

  /** On its port, or where the plug of another instrument of the rig should be. */
  async #find<T extends Instrument>(instrument: RigInstrument, greet: (transport: Transport) => Promise<T>): Promise<T> {
    const port = this.#portOf(instrument);
    let failure: InstrumentError;
    try {
      return await this.#openOn(port, instrument, greet);
    } catch (error) {
      if (!isMaybeSomebodyElse(error)) throw error;
      failure = error;
    }
    // Only what says who it is, and is not the double of another, can be recognised elsewhere.
    const { identification } = instrument;
    if (identification === undefined || this.#others(instrument).some((other) => mayAnswerAs(other, identification))) throw failure;
    if (this.#met.has(instrument.id) && !(failure instanceof WrongInstrumentError)) throw failure;
    for (const other of this.#others(instrument)) {
      const otherPort = this.#portOf(other);
      if (this.#open.has(other.id) || otherPort === port) continue;
      try {
        const found = await this.#openOn(otherPort, instrument, greet);
        this.#ports.set(instrument.id, otherPort);
        this.#ports.set(other.id, port);
        this.#parts.say(
          `${instrument.id} and ${other.id} are swapped on their ports: ${instrument.id} answers on ${otherPort}. It is used there; refettle rig check writes it down.`,
        );
        return found;
      } catch (error) {
        if (!(error instanceof InstrumentError)) throw error;
      }
    }
    throw failure;
  }

  #others = ({ id }: RigInstrument): RigInstrument[] => this.#parts.instruments.filter((other) => other.id !== id);

  #portOf = ({ id, port }: RigInstrument): string => this.#ports.get(id) ?? port;

  async #openOn<T extends Instrument>(port: string, instrument: RigInstrument, greet: (transport: Transport) => Promise<T>): Promise<T> {
    const transport = await this.#parts.openPort(instrument, port);
    try {
      const opened = await greet(transport);
      this.#check(instrument, opened.identification, transport);
      this.#met.add(instrument.id);
      transport.onClose(() => this.#open.delete(instrument.id));
      return opened;
    } catch (error) {
      await transport.close();
      throw error;
    }
  }

  /** Refuses an instrument that is another than the rig file names, and one that it names elsewhere. */
  #check(instrument: RigInstrument, answered: string, transport: Transport): void {
    const { identification } = instrument;
    if (mayAnswerAs(instrument, answered)) return;
    const named = this.#others(instrument).find((other) => mayAnswerAs(other, answered));
    if (identification === undefined && named === undefined) return;
    throw new WrongInstrumentError(transport, identification ?? 'another instrument', answered, named?.id);
  }
}

const mayAnswerAs = ({ identification }: RigInstrument, answered: string): boolean =>
  identification !== undefined && isSameInstrument(identification, answered);

/** What an instrument looks like that hangs on another one's port: at another speed it is silent, or makes no sense. */
function isMaybeSomebodyElse(error: unknown): error is InstrumentError {
  return [WrongInstrumentError, InstrumentTimeoutError, GarbageError, HalfAnswerError, NoLinesError].some((kind) => error instanceof kind);
}
