import { readFile, stat } from 'node:fs/promises';
import type { SerialPortStream } from '@serialport/stream';
import {
  DisconnectedError,
  InstrumentError,
  PermissionError,
  PortBusyError,
  PortClosedError,
  PortMissingError,
  type Where,
} from './instrument-error.js';
import { LineSplitter } from './line-splitter.js';
import { machinePorts } from './machine-ports.js';
import { deviceOf, holderOf, holderText, lockFileHolder, takeLockFile, USUAL_LOCK_FOLDER } from './port-holder.js';

/** What drives a port: the real driver, or the mock that simulated instruments hang on. */
export type Binding = ConstructorParameters<typeof SerialPortStream>[0]['binding'];

export interface TransportOptions {
  /** The instrument's id in the rig file; it stands in every message. */
  instrument: string;
  path: string;
  baudRate: number;
  /** The real driver unless given. */
  binding?: Binding | undefined;
  /** Where programs put lock files for ports; the usual folder unless given. */
  lockFolder?: string | undefined;
}

/** A serial port, line by line. */
export interface Transport extends Where {
  write(line: string): Promise<void>;
  /** Calls `listener` with each line; returns what ends that. */
  onLine(listener: (line: string) => void): () => void;
  /** Calls `listener` once when the port is gone, at once if it is already. */
  onClose(listener: (reason: InstrumentError) => void): () => void;
  /** Stops and resumes reading, for a consumer that can't keep up; the driver holds what comes meanwhile. */
  pause(): void;
  resume(): void;
  /** Bytes that were no part of any line. */
  droppedBytes(): number;
  /** What stands behind the last line end. */
  unfinished(): string;
  close(): Promise<void>;
}

/**
 * Opens a port: 8 data bits, no parity, 1 stop bit, LF at the end of a line (contract, section 6). Nobody else may have it: the
 * driver locks it, and a lock file tells programs that look for one.
 */
export async function openTransport(options: TransportOptions): Promise<Transport> {
  const where: Where = { instrument: options.instrument, port: options.path };
  const lockFolder = options.lockFolder ?? USUAL_LOCK_FOLDER;
  const device = deviceOf(options.path);
  if (lockFileHolder(device, lockFolder) !== undefined) throw busy(where, lockFolder);
  const { SerialPortStream } = await import('@serialport/stream');
  const binding = options.binding ?? (await import('./serial-driver.js')).serialDriver;
  const stream = new SerialPortStream({ binding, path: options.path, baudRate: options.baudRate, autoOpen: false });
  await new Promise<void>((resolve, reject) => stream.open((error) => (error ? reject(error) : resolve()))).catch(
    async (error: unknown) => {
      throw await openingError(error, where, { lockFolder, real: options.binding === undefined });
    },
  );
  const giveBack = takeLockFile(device, lockFolder);
  stream.on('close', giveBack);
  return new SerialTransport(stream, where);
}

/** The mock that simulated ports are made on. Always this one: the mock package holds two copies, and ports of one do not exist in the other. */
export async function simulatedBinding() {
  return (await import('serialport')).SerialPortMock.binding;
}

class SerialTransport implements Transport {
  readonly instrument: string;
  readonly port: string;
  readonly #stream: SerialPortStream;
  readonly #splitter = new LineSplitter();
  readonly #lineListeners = new Set<(line: string) => void>();
  readonly #closeListeners = new Set<(reason: InstrumentError) => void>();
  #closed: InstrumentError | undefined;

  constructor(stream: SerialPortStream, where: Where) {
    this.instrument = where.instrument;
    this.port = where.port;
    this.#stream = stream;
    stream.on('data', (chunk: Buffer) => {
      for (const line of this.#splitter.push(chunk)) for (const listener of [...this.#lineListeners]) listener(line);
    });
    stream.on('error', (error: Error) => {
      this.#end(new DisconnectedError(where, { cause: error }));
      // A port that failed is given back, or it could not be opened again when the plug returns.
      if (stream.isOpen) stream.close(() => undefined);
    });
    stream.on('close', (error: Error | null) =>
      this.#end(error ? new DisconnectedError(where, { cause: error }) : new PortClosedError(where)),
    );
  }

  async write(line: string): Promise<void> {
    if (this.#closed) throw this.#closed;
    await new Promise<void>((resolve, reject) => {
      const stopListening = this.onClose(reject);
      this.#stream.write(`${line}\n`, 'latin1', (error) => {
        stopListening();
        if (error) reject(this.#closed ?? new DisconnectedError(this, { cause: error }));
        else resolve();
      });
    });
  }

  onLine(listener: (line: string) => void): () => void {
    this.#lineListeners.add(listener);
    return () => void this.#lineListeners.delete(listener);
  }

  onClose(listener: (reason: InstrumentError) => void): () => void {
    if (this.#closed) listener(this.#closed);
    else this.#closeListeners.add(listener);
    return () => void this.#closeListeners.delete(listener);
  }

  pause(): void {
    this.#stream.pause();
  }

  resume(): void {
    this.#stream.resume();
  }

  droppedBytes(): number {
    return this.#splitter.droppedBytes;
  }

  unfinished(): string {
    return this.#splitter.unfinished;
  }

  async close(): Promise<void> {
    if (!this.#stream.isOpen) return;
    await new Promise<void>((resolve) => this.#stream.close(() => resolve()));
  }

  #end(reason: InstrumentError): void {
    if (this.#closed) return;
    this.#closed = reason;
    for (const listener of [...this.#closeListeners]) listener(reason);
    this.#closeListeners.clear();
  }
}

/** The driver's words for why a port would not open, and the mock's. */
async function openingError(error: unknown, where: Where, machine: { lockFolder: string; real: boolean }): Promise<InstrumentError> {
  const words = error instanceof Error ? error.message : String(error);
  if (/permission denied|access denied/i.test(words)) return new PermissionError(where, await groupOf(where.port), { cause: error });
  if (/cannot lock|is locked|temporarily unavailable|resource busy/i.test(words)) return busy(where, machine.lockFolder, error);
  if (/no such (file|device)|file not found|does not exist/i.test(words))
    return new PortMissingError(where, machine.real ? (await machinePorts()).map(({ path }) => path) : undefined, { cause: error });
  return new InstrumentError(
    `the port would not open: ${words}`,
    { ...where, toDo: 'Check the port and the baud rate in the rig file.' },
    { cause: error },
  );
}

function busy(where: Where, lockFolder: string, cause?: unknown): PortBusyError {
  const holder = holderOf(where.port, lockFolder);
  return new PortBusyError(where, holder && holderText(holder), { cause });
}

/** On Debian and its kin serial ports belong to this group; elsewhere the device itself says. */
const USUAL_GROUP = 'dialout';

async function groupOf(path: string): Promise<string> {
  try {
    const { gid } = await stat(path);
    const groups = await readFile('/etc/group', 'utf8');
    const name = groups.split('\n').find((line) => line.split(':')[2] === String(gid));
    return name?.split(':')[0] ?? USUAL_GROUP;
  } catch {
    return USUAL_GROUP;
  }
}
