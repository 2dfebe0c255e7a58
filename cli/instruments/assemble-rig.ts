import { BadInputError } from '../../shared/errors.js';
import { convertUnit } from '../../shared/measure/convert-unit.js';
import { parseAccuracy } from '../../shared/measure/parse-accuracy.js';
import { DisconnectedError, TestBrokenOffError } from './instrument-error.js';
import { openLightProbe, type LightProbe } from './light-probe.js';
import { MEASURE_COMMANDS, openMeter } from './meter.js';
import { OpenInstruments } from './open-instruments.js';
import { USUAL_TRY_EVERY_MS, waitForReturn, type Patience } from './patience.js';
import { meterFor, probeOf, rangeAt, type Rig, type RigInstrument } from './rig-file.js';
import type { OpenRig, ProbeEvent } from './rig.js';
import { SampleTimeline } from './sample-timeline.js';
import type { Hands } from './simulated/hands.js';
import { openTransport, type Binding } from './transport.js';

/** Contract, section 6: the meter has 9600 baud unless the rig says otherwise, the probe 115200. */
export const METER_BAUD_RATE = 9600;
export const PROBE_BAUD_RATE = 115_200;
/** A plug that loses its contact again and again is no interruption any more. */
const MOST_RETURNS_A_MEASUREMENT = 3;
const MOST_RETURNS_A_CAPTURE = 20;

/** What a simulated rig replaces. */
export interface RigParts {
  binding?: Binding;
  nowUs?: () => number;
  hands?: Hands;
  measureTimeoutMs?: number;
  /** How often an unplugged instrument is looked for. */
  tryEveryMs?: number;
  /** Called after the ports are closed. */
  dispose?: () => void;
}

/** Puts a rig together from its file. Opens nothing yet. With `patience` an instrument that is unplugged at work is waited for. */
export function assembleRig(rig: Rig, parts: RigParts = {}, patience?: Patience): OpenRig {
  const nowUs = parts.nowUs ?? ((): number => performance.now() * 1000);
  const open = new OpenInstruments({
    instruments: rig.instruments,
    openPort: (instrument, path) =>
      openTransport({
        instrument: instrument.id,
        path,
        baudRate: instrument.baudRate ?? usualBaudRate(instrument),
        binding: parts.binding,
      }),
    say: (line) => patience?.say(line),
  });
  const waitWith = (then: string, notice?: (line: string) => void) =>
    patience === undefined || rig.reconnectSeconds === 0
      ? undefined
      : {
          say: notice ?? ((line: string): void => patience.say(line)),
          signal: patience.signal,
          seconds: rig.reconnectSeconds,
          tryEveryMs: parts.tryEveryMs ?? USUAL_TRY_EVERY_MS,
          then,
        };

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
      const openProbe = (): Promise<LightProbe> =>
        open.open(instrument, (transport) => openLightProbe(transport, { sampleRateHz: rig.sampleRateHz, scaleMax: rig.scaleMax, nowUs }));
      const probe = await openProbe();
      if (Math.max(...order) >= probe.sensorCount || (instrument.sensors === undefined && probe.sensorCount !== lampIds.length)) {
        await open.close(id);
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
        async *read(signal, notice) {
          const timeline = new SampleTimeline(rig.sampleRateHz);
          const inOrder = (event: ProbeEvent): ProbeEvent =>
            event.kind === 'gap' ? event : { ...event, levels: order.map((sensor) => event.levels[sensor] ?? 0) };
          let reading = probe;
          for (let returns = 0; ; returns += 1) {
            try {
              for await (const event of reading.read(signal, timeline)) yield inOrder(event);
              return;
            } catch (error) {
              const wait = waitWith('the recording goes on, with a gap', notice);
              if (!(error instanceof DisconnectedError) || wait === undefined || returns === MOST_RETURNS_A_CAPTURE) throw error;
              const back = await waitForReturn(error, openProbe, wait, signal);
              if (back === undefined) {
                yield* timeline.finish();
                return;
              }
              timeline.away();
              reading = back;
            }
          }
        },
        close: () => open.close(id),
      };
    },

    async openMeterFor(quantity, unit, { energises = quantity === 'insulation resistance' } = {}) {
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
      const openIt = () =>
        open.open(instrument, (transport) =>
          openMeter(transport, {
            measureTimeoutMs: instrument.measureTimeoutMs ?? parts.measureTimeoutMs,
            overloadFrom: (asked) => instrument.accuracy[asked]?.overloadFrom,
          }),
        );
      const { identification } = await openIt();
      /** A measurement that lost its instrument is asked again when it is back; one on a machine under voltage is not. */
      const measured = async (): Promise<number> => {
        for (let returns = 0; ; returns += 1) {
          try {
            return (await (await openIt()).measure(quantity, { once: energises })).value;
          } catch (error) {
            const wait = waitWith(energises ? 'the step is to be repeated' : 'the measurement is asked for again');
            if (!(error instanceof DisconnectedError) || wait === undefined || returns === MOST_RETURNS_A_MEASUREMENT) throw error;
            await waitForReturn(error, openIt, wait);
            if (energises) throw new TestBrokenOffError(error, { cause: error });
          }
        }
      };
      return {
        id,
        identification,
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
          const value = await measured();
          range = rangeAt(specification, convertUnit(value, answered, specification.unit));
          return convertUnit(value, answered, shown);
        },
        close: () => open.close(id),
      };
    },

    async close() {
      await open.closeAll();
      parts.dispose?.();
    },
  };
}

export const usualBaudRate = ({ kind }: Pick<RigInstrument, 'kind'>): number =>
  kind === 'light-probe' ? PROBE_BAUD_RATE : METER_BAUD_RATE;

/** The sensor for each lamp. Without a list in the rig file the sensors are taken to sit in panel order. */
function sensorOrder(lampIds: readonly string[], sensors: readonly string[] | undefined): number[] {
  if (sensors === undefined) return lampIds.map((_lamp, index) => index);
  return lampIds.map((lamp) => {
    const sensor = sensors.indexOf(lamp);
    if (sensor < 0) throw new BadInputError(`no sensor of the light probe looks at the lamp '${lamp}': say in the rig file which one does`);
    return sensor;
  });
}
