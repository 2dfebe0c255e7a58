import { BadInputError } from '../../shared/errors.js';
import { convertUnit } from '../../shared/measure/convert-unit.js';
import { parseAccuracy } from '../../shared/measure/parse-accuracy.js';
import { openLightProbe, type LightProbe } from './light-probe.js';
import { MEASURE_COMMANDS, openMeter, type ScpiMeter } from './meter.js';
import { meterFor, probeOf, rangeAt, type Rig } from './rig-file.js';
import type { OpenRig } from './rig.js';
import type { Hands } from './simulated/hands.js';
import { openTransport, type Binding, type Transport } from './transport.js';

/** Contract, section 6: the meter has 9600 baud unless the rig says otherwise, the probe 115200. */
const METER_BAUD_RATE = 9600;
const PROBE_BAUD_RATE = 115_200;

/** What a simulated rig replaces. */
export interface RigParts {
  binding?: Binding;
  nowUs?: () => number;
  hands?: Hands;
  measureTimeoutMs?: number;
  /** Called after the ports are closed. */
  dispose?: () => void;
}

/** Puts a rig together from its file. Opens nothing yet. */
export function assembleRig(rig: Rig, parts: RigParts = {}): OpenRig {
  const meters = new OpenInstruments<ScpiMeter>();
  const probes = new OpenInstruments<LightProbe>();
  const nowUs = parts.nowUs ?? ((): number => performance.now() * 1000);

  return {
    name: rig.name,
    simulated: parts.hands !== undefined,
    ...(parts.hands === undefined ? {} : { hands: parts.hands }),

    meterInfo(quantity) {
      const found = meterFor(rig, quantity);
      return found && { id: found.instrument.id, kind: found.instrument.kind, unit: found.specification.unit };
    },
    hasProbe: () => probeOf(rig) !== undefined,

    async openProbe(lampIds) {
      const instrument = probeOf(rig);
      if (instrument === undefined)
        throw new BadInputError(`the rig ${rig.name} has no light probe: add it to the rig file, or tap the lamps with keys`);
      const order = sensorOrder(lampIds, instrument.sensors);
      const { id } = instrument;
      const probe = await probes.open(
        id,
        () =>
          openTransport({
            instrument: id,
            path: instrument.port,
            baudRate: instrument.baudRate ?? PROBE_BAUD_RATE,
            binding: parts.binding,
          }),
        (transport) => openLightProbe(transport, { sampleRateHz: rig.sampleRateHz, scaleMax: rig.scaleMax, nowUs }),
      );
      if (Math.max(...order) >= probe.sensorCount || (instrument.sensors === undefined && probe.sensorCount !== lampIds.length)) {
        await probes.close(id);
        throw new BadInputError(
          `the probe ${id} has ${probe.sensorCount} sensors, and the panel ${lampIds.length} lamps: say in the rig file which sensor looks at which lamp`,
        );
      }
      return {
        id,
        identification: probe.identification,
        sensorCount: probe.sensorCount,
        sampleRateHz: rig.sampleRateHz,
        scaleMax: rig.scaleMax,
        async *read(signal) {
          for await (const event of probe.read(signal)) {
            yield event.kind === 'gap' ? event : { ...event, levels: order.map((sensor) => event.levels[sensor] ?? 0) };
          }
        },
        close: () => probes.close(id),
      };
    },

    async openMeterFor(quantity, unit) {
      const found = meterFor(rig, quantity);
      if (found === undefined)
        throw new BadInputError(
          `no instrument of the rig ${rig.name} measures ${quantity}: add one to the rig file, or type the reading in`,
        );
      const { instrument, specification } = found;
      const { id } = instrument;
      const answered = MEASURE_COMMANDS[quantity].unit;
      const shown = unit ?? specification.unit;
      let range = rangeAt(specification, 0);
      // Refuses a unit of another kind before a port is opened.
      convertUnit(range.resolution, specification.unit, shown);
      const meter = await meters.open(
        id,
        () =>
          openTransport({
            instrument: id,
            path: instrument.port,
            baudRate: instrument.baudRate ?? METER_BAUD_RATE,
            binding: parts.binding,
          }),
        (transport) =>
          openMeter(transport, {
            measureTimeoutMs: instrument.measureTimeoutMs ?? parts.measureTimeoutMs,
            overloadFrom: (asked) => instrument.accuracy[asked]?.overloadFrom,
          }),
      );
      return {
        id,
        identification: meter.identification,
        unit: shown,
        get accuracy() {
          return parseAccuracy(range.accuracy);
        },
        get accuracyText() {
          return range.accuracy;
        },
        get resolution() {
          return convertUnit(range.resolution, specification.unit, shown);
        },
        async measure() {
          const { value } = await meter.measure(quantity);
          range = rangeAt(specification, convertUnit(value, answered, specification.unit));
          return convertUnit(value, answered, shown);
        },
        close: () => meters.close(id),
      };
    },

    async close() {
      await Promise.all([meters.closeAll(), probes.closeAll()]);
      parts.dispose?.();
    },
  };
}

/** The sensor for each lamp. Without a list in the rig file the sensors are taken to sit in panel order. */
function sensorOrder(lampIds: readonly string[], sensors: readonly string[] | undefined): number[] {
  if (sensors === undefined) return lampIds.map((_lamp, index) => index);
  return lampIds.map((lamp) => {
    const sensor = sensors.indexOf(lamp);
    if (sensor < 0) throw new BadInputError(`no sensor of the light probe looks at the lamp '${lamp}': say in the rig file which one does`);
    return sensor;
  });
}

/** Instruments that are open, by id. One that failed to open or lost its port is forgotten, so that the next try opens it afresh. */
class OpenInstruments<T extends { close(): Promise<void> }> {
  readonly #open = new Map<string, Promise<T>>();

  async open(id: string, openPort: () => Promise<Transport>, greet: (transport: Transport) => Promise<T>): Promise<T> {
    const known = this.#open.get(id);
    if (known) return known;
    const opening = this.#opening(id, openPort, greet);
    this.#open.set(id, opening);
    opening.catch(() => this.#open.delete(id));
    return opening;
  }

  async #opening(id: string, openPort: () => Promise<Transport>, greet: (transport: Transport) => Promise<T>): Promise<T> {
    const transport = await openPort();
    try {
      const instrument = await greet(transport);
      transport.onClose(() => this.#open.delete(id));
      return instrument;
    } catch (error) {
      await transport.close();
      throw error;
    }
  }

  async close(id: string): Promise<void> {
    const opening = this.#open.get(id);
    this.#open.delete(id);
    await opening?.then((instrument) => instrument.close()).catch(() => undefined);
  }

  async closeAll(): Promise<void> {
    await Promise.all([...this.#open.keys()].map((id) => this.close(id)));
  }
}
