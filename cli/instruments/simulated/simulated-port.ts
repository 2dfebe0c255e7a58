import { simulatedBinding, type Binding } from '../transport.js';

/** An instrument as a program: lines in, text out. It knows no port, so it can hang on a mock or on a real one. */
export interface SimulatedInstrument {
  /** Hands over the way back to the host; text holds its own line ends. */
  connect(send: (text: string) => void): void;
  /** A whole line came in, without its line end. */
  receive(line: string): void;
  /** The host closed the port: stop sending. */
  disconnect(): void;
}

/** Something to plug in, and where. */
export interface SimulatedPlug {
  path: string;
  instrument: SimulatedInstrument;
}

/**
 * Makes mock ports exist with instruments behind them. `unplug` pulls a cable: reads on that port fail as a real driver's do, and it
 * can't be opened again until the plug is back.
 */
export async function plugIn(
  plugs: readonly SimulatedPlug[],
): Promise<{ binding: Binding; unplug: (path: string, backAfterMs?: number) => void }> {
  const mock = await simulatedBinding();
  const pulled = new Map<string, () => void>();
  const away = new Set<string>();
  for (const { path } of plugs) mock.createPort(path, { echo: false, record: false, manufacturer: 'Simulated' });

  const binding = {
    ...mock,
    async open(options: Parameters<typeof mock.open>[0]) {
      if (away.has(options.path)) throw new Error(`Error: No such file or directory, cannot open ${options.path}`);
      const port = await mock.open(options);
      const instrument = plugs.find(({ path }) => path === options.path)?.instrument;
      if (instrument === undefined) return port;

      const unplugged = new Promise<never>((_resolve, reject) => {
        pulled.set(options.path, () => {
          instrument.disconnect();
          reject(new Error('the device is gone'));
        });
      });
      unplugged.catch(() => undefined);
      const [read, write, close] = [port.read.bind(port), port.write.bind(port), port.close.bind(port)];
      port.read = (buffer, offset, length) => Promise.race([read(buffer, offset, length), unplugged]);
      let pending = '';
      port.write = async (bytes: Buffer) => {
        await write(bytes);
        const lines = (pending + bytes.toString('latin1')).split('\n');
        pending = lines.pop() ?? '';
        for (const line of lines) instrument.receive(line.replace(/\r$/, ''));
      };
      port.close = async () => {
        instrument.disconnect();
        await close();
      };
      instrument.connect((text) => {
        if (port.isOpen) port.emitData(Buffer.from(text, 'latin1'));
      });
      return port;
    },
  };
  const unplug = (path: string, backAfterMs = 0): void => {
    if (backAfterMs > 0) {
      away.add(path);
      setTimeout(() => away.delete(path), backAfterMs).unref();
    }
    pulled.get(path)?.();
  };
  return { binding: binding as unknown as Binding, unplug };
}
