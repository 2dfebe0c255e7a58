import { PROBE_CLOCK_SPAN_US, writeSampleLine } from '../sample-line.js';
import type { ProbeFault } from './scenario.js';
import { SimulatedScpi } from './simulated-scpi.js';

/** What the lamps do from the moment the probe is started: times in microseconds from 0, a level a sensor. */
export type SampleSource = Iterable<{ tUs: number; levels: readonly number[] }>;

/** A probe on a bad cable: the chance of each line to come damaged, or not at all. */
export interface LineTrouble {
  damaged: number;
  missing: number;
  random: () => number;
}

export interface SimulatedProbeOptions {
  identification: string;
  sensorCount: number;
  /** What the lamps show now; asked each time the probe is started. */
  source: () => SampleSource;
  /** How many times faster than life. */
  speed: number;
  /** The probe's own clock when it is switched on; near 2^32 it wraps soon. */
  clockStartUs?: number;
  trouble?: LineTrouble | undefined;
  faults?: readonly ProbeFault[] | undefined;
  /** Pulls the plug for so many seconds of the scenario. */
  unplug?: ((seconds: number) => void) | undefined;
}

/** How often what is due is sent. */
const TICK_MS = 10;

/** The light probe: SENSe:LAMP:COUNt?, INITiate:CONTinuous, and a line a sample while it runs. */
export class SimulatedProbe extends SimulatedScpi {
  readonly #options: SimulatedProbeOptions;
  #clockUs: number;
  #timer: NodeJS.Timeout | undefined;
  readonly #faults: ProbeFault[];
  /** The lamps that were being looked at when the plug came out: the machine goes on without its probe. */
  #going: { samples: Iterator<{ tUs: number; levels: readonly number[] }>; startedMs: number } | undefined;
  #silentUntilUs = 0;

  constructor(options: SimulatedProbeOptions) {
    super(options.identification, [
      { pattern: 'SENSe:LAMP:COUNt?', run: () => String(options.sensorCount) },
      {
        pattern: 'INITiate:CONTinuous',
        parameter: 'required',
        run: (parameter, refuse) => {
          if (/^(on|1)$/i.test(parameter)) this.#start();
          else if (/^(off|0)$/i.test(parameter)) this.#stop();
          else refuse(-224, 'Illegal parameter value');
          return undefined;
        },
      },
    ]);
    this.#options = options;
    this.#faults = [...(options.faults ?? [])];
    this.#clockUs = options.clockStartUs ?? 0;
  }

  override disconnect(): void {
    this.#stop();
    super.disconnect();
  }

  #start(): void {
    if (this.#timer) return;
    const { speed, source } = this.#options;
    const samples = this.#going?.samples ?? source()[Symbol.iterator]();
    const startedMs = this.#going?.startedMs ?? performance.now();
    const dueUs = (): number => (performance.now() - startedMs) * 1000 * speed;
    // What the lamps did while the plug was out has been seen by nobody.
    let next = samples.next();
    if (this.#going) while (next.done !== true && next.value.tUs < dueUs()) next = samples.next();
    this.#going = undefined;
    let clockAtStartUs = this.#clockUs - (next.done === true ? 0 : next.value.tUs);
    this.#silentUntilUs = 0;
    this.#timer = setInterval(() => {
      const untilUs = dueUs();
      let text = '';
      for (; next.done !== true && next.value.tUs <= untilUs; next = samples.next()) {
        const { tUs, levels } = next.value;
        const fault = this.#faultAt(tUs);
        if (fault?.fault === 'silence') this.#silentUntilUs = tUs + fault.seconds * 1_000_000;
        if (fault?.fault === 'restart') clockAtStartUs = -tUs;
        if (fault?.fault === 'unplug') {
          this.#clockUs = 0;
          this.transmit(text);
          this.#options.unplug?.(fault.seconds);
          this.#going = { samples, startedMs };
          return;
        }
        this.#clockUs = (clockAtStartUs + tUs + PROBE_CLOCK_SPAN_US) % PROBE_CLOCK_SPAN_US;
        if (tUs >= this.#silentUntilUs) text += this.#line(levels);
      }
      if (text !== '') this.transmit(text);
      // The lamps' plan is over: a machine that shows nothing more is one that was switched off.
      if (next.done === true) this.#stop();
    }, TICK_MS);
  }

  /** The fault that is due now; each happens once. */
  #faultAt(tUs: number): ProbeFault | undefined {
    const index = this.#faults.findIndex(({ at }) => tUs >= at * 1_000_000);
    return index < 0 ? undefined : this.#faults.splice(index, 1)[0];
  }

  #stop(): void {
    clearInterval(this.#timer);
    this.#timer = undefined;
  }

  #line(levels: readonly number[]): string {
    const line = writeSampleLine({ tUs: this.#clockUs, levels: [...levels] });
    const { trouble } = this.#options;
    if (trouble === undefined) return `${line}\r\n`;
    const chance = trouble.random();
    if (chance < trouble.missing) return '';
    if (chance >= trouble.missing + trouble.damaged) return `${line}\r\n`;
    // One digit read wrong on the way.
    const at = 1 + Math.floor(trouble.random() * (line.length - 4));
    return `${line.slice(0, at)}${String.fromCharCode(line.charCodeAt(at) ^ 1)}${line.slice(at + 1)}\r\n`;
  }
}
