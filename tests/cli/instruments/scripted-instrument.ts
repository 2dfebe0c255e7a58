import { plugIn, type SimulatedInstrument } from '../../../cli/instruments/simulated/simulated-port.js';
import { openTransport, type Transport } from '../../../cli/instruments/transport.js';

/** An instrument whose every answer the test decides. `answer` gets each line that came in. */
export class ScriptedInstrument implements SimulatedInstrument {
  readonly received: string[] = [];
  send: (text: string) => void = () => undefined;
  constructor(private readonly answer: (line: string, instrument: ScriptedInstrument) => string | undefined) {}
  connect(send: (text: string) => void): void {
    this.send = send;
  }
  disconnect(): void {
    this.send = () => undefined;
  }
  receive(line: string): void {
    this.received.push(line);
    const text = this.answer(line, this);
    if (text !== undefined) this.send(text);
  }
}

let ports = 0;

/** Plugs an instrument into a mock port of its own and opens it. */
export async function opened(instrument: SimulatedInstrument, name = 'M-03'): Promise<{ transport: Transport; unplug: () => void }> {
  ports += 1;
  const path = `/sim/test-${ports}`;
  const { binding, unplug } = await plugIn([{ path, instrument }]);
  return { transport: await openTransport({ instrument: name, path, baudRate: 9600, binding }), unplug: () => unplug(path) };
}
