import { readFile } from 'node:fs/promises';
import { BadInputError } from '../../../shared/errors.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import { baseUnitOf, convertUnit } from '../../../shared/measure/convert-unit.js';
import { assembleRig } from '../assemble-rig.js';
import { USUAL_TRY_EVERY_MS, type Patience } from '../patience.js';
import { parseRig, type Rig } from '../rig-file.js';
import type { OpenRig } from '../rig.js';
import type { Hands } from './hands.js';
import { lampSamples, marksIn } from './lamp-source.js';
import { parseScenario, type LampStretch, type Scenario } from './scenario.js';
import { BUILT_IN_SCENARIOS } from './scenarios/built-in.js';
import { SimulatedMeter, type Measured } from './simulated-meter.js';
import { plugIn } from './simulated-port.js';
import { SimulatedProbe } from './simulated-probe.js';

/** The simulated bench, in the form of any rig file. Accuracies are those of ordinary bench instruments; the instruments are invented. */
const rigText = (bench: string, lamps: readonly string[]): string => `
format: refettle.rig
version: 1
name: ${JSON.stringify(bench)}
scaleMax: 1023
sampleRateHz: 100
instruments:
  - {id: P-01, kind: light-probe, port: PORTS/probe, identification: 'Millrace,LP-6,SIM0001,1.0', sensors: [${lamps.join(', ')}]}
  - id: M-03
    kind: meter
    port: PORTS/meter
    identification: 'Millrace,BM-4,SIM0003,1.0'
    accuracy:
      resistance:
        unit: ohm
        ranges:
          - {upTo: 2, accuracy: 2%+4, resolution: 0.001}
          - {upTo: 600, accuracy: 0.5%+3, resolution: 0.1}
          - {upTo: 6000, accuracy: 0.5%+3, resolution: 1}
          - {upTo: 60000, accuracy: 0.5%+3, resolution: 10}
      voltage ac: {unit: V, accuracy: 0.8%+3, resolution: 0.1}
      voltage dc: {unit: V, accuracy: 0.5%+2, resolution: 0.01}
      capacitance: {unit: uF, accuracy: 1%+5, resolution: 0.01}
      temperature: {unit: degC, accuracy: 1%+1, resolution: 1}
  - id: M-05
    kind: insulation-tester
    port: PORTS/insulation
    identification: 'Millrace,IT-1,SIM0005,1.0'
    accuracy:
      insulation resistance: {unit: Mohm, accuracy: 3%+5, resolution: 0.01}
  - id: M-07
    kind: leakage-meter
    port: PORTS/leakage
    identification: 'Millrace,LC-2,SIM0007,1.0'
    accuracy:
      current ac: {unit: mA, accuracy: 2%+5, resolution: 0.01}
`;

/** Nobody wants to wait for a simulated meter that does not answer. */
const SIMULATED_MEASURE_TIMEOUT_MS = 300;
/** As long after its question comes a late answer. */
const SIMULATED_LATE_MS = 450;
const LEAST_TRY_EVERY_MS = 20;
/** The probe has been on for more than an hour: its clock wraps 20 s into the first capture, as it would in life. */
const PROBE_CLOCK_START_US = 2 ** 32 - 20_000_000;

let rigs = 0;

/** The rig of a scenario: a built-in one by name, or a file that ends in `.yaml` or `.yml`. Opens nothing yet. */
export async function simulateRig(name: string, patience?: Patience): Promise<OpenRig> {
  return simulateScenario(await scenarioNamed(name), patience);
}

/** The rig file of a scenario, for who wants to see it. */
export async function simulatedRigFile(name: string): Promise<Rig> {
  const scenario = await scenarioNamed(name);
  return rigOf(scenario, `/sim/${scenario.name}`);
}

const rigOf = (scenario: Scenario, ports: string): Rig => ({
  ...parseRig(rigText(`sim:${scenario.name}`, scenario.panel.lamps).replaceAll('PORTS', ports), scenario.name),
  ...(scenario.reconnectSeconds === undefined ? {} : { reconnectSeconds: scenario.reconnectSeconds }),
});

async function scenarioNamed(name: string): Promise<Scenario> {
  const builtIn = Object.hasOwn(BUILT_IN_SCENARIOS, name) ? BUILT_IN_SCENARIOS[name] : undefined;
  if (builtIn !== undefined) return parseScenario(builtIn, name);
  if (!/\.ya?ml$/.test(name))
    throw new BadInputError(
      `there is no simulated rig '${name}': use one of ${Object.keys(BUILT_IN_SCENARIOS).join(', ')}, or a scenario file (.yaml)`,
    );
  const text = await readFile(name, 'utf8').catch(() => {
    throw new BadInputError('there is no such scenario file', { file: name });
  });
  return parseScenario(text, name);
}

/** Plugs the scenario's instruments into mock ports of their own and puts a rig together on them. */
export async function simulateScenario(scenario: Scenario, patience?: Patience): Promise<OpenRig> {
  rigs += 1;
  const ports = `/sim/${scenario.name}-${rigs}`;
  const rig = rigOf(scenario, ports);
  const machine = new SimulatedMachine(scenario);
  const { speed } = scenario;

  /** Where an instrument hangs: on its own port, unless two plugs are swapped. */
  const portOf = (name: string): string => {
    const [one, other] = scenario.swapped ?? [];
    return `${ports}/${name === one ? other : name === other ? one : name}`;
  };
  const unplugFrom = (name: string) => (seconds?: number) =>
    pulled.unplug(portOf(name), seconds === undefined ? 0 : (seconds * 1000) / speed);
  const pulled: { unplug: (path: string, backAfterMs: number) => void } = { unplug: () => undefined };
  const meterAt = (name: string, identification: string) => ({
    path: portOf(name),
    instrument: new SimulatedMeter(identification, (unit) => machine.measured(unit), {
      unplug: unplugFrom(name),
      lateMs: SIMULATED_LATE_MS,
    }),
  });
  const { binding, unplug } = await plugIn([
    {
      path: portOf('probe'),
      instrument: new SimulatedProbe({
        identification: 'Millrace,LP-6,SIM0001,1.0',
        sensorCount: scenario.panel.lamps.length,
        source: () =>
          lampSamples(machine.plan(), scenario.panel, { sampleRateHz: rig.sampleRateHz, scaleMax: rig.scaleMax, seed: scenario.seed }),
        speed,
        clockStartUs: PROBE_CLOCK_START_US,
        trouble: scenario.probeTrouble && { ...scenario.probeTrouble, random: seededRandom(scenario.seed) },
        faults: scenario.probeFaults,
        unplug: unplugFrom('probe'),
      }),
    },
    meterAt('meter', 'Millrace,BM-4,SIM0003,1.0'),
    meterAt('insulation', 'Millrace,IT-1,SIM0005,1.0'),
    meterAt('leakage', 'Millrace,LC-2,SIM0007,1.0'),
  ]);
  pulled.unplug = unplug;
  return assembleRig(
    rig,
    {
      binding,
      hands: machine,
      nowUs: () => performance.now() * 1000 * speed,
      measureTimeoutMs: SIMULATED_MEASURE_TIMEOUT_MS,
      tryEveryMs: Math.max(LEAST_TRY_EVERY_MS, USUAL_TRY_EVERY_MS / speed),
    },
    patience,
  );
}

/** The machine on the bench and the technician before it: what the instruments see, and what is answered. */
class SimulatedMachine implements Hands {
  readonly #scenario: Scenario;
  readonly #taken = new Map<string, number>();
  #mended = false;
  #checkId: string | undefined;
  #shown: readonly LampStretch[];

  constructor(scenario: Scenario) {
    this.#scenario = scenario;
    this.#shown = this.#planFor('capture', 'capture');
  }

  probesOn(checkId: string): void {
    this.#checkId = checkId;
  }

  lampsShow(name: string, kind: 'capture' | 'watch' = 'capture'): void {
    this.#shown = this.#planFor(name, kind);
  }

  marks(): readonly number[] {
    return marksIn(this.#shown, this.#scenario.panel);
  }

  repaired(): void {
    this.#mended = true;
    this.#taken.clear();
    this.#shown = this.#planFor('capture', 'capture');
  }

  answer(stepId: string, kind: string): string | undefined {
    const { answers, answersAfter } = this.#scenario;
    const after = this.#mended ? answersAfter : {};
    return after[stepId] ?? answers[stepId] ?? after[kind] ?? answers[kind];
  }

  repairDetails(stepId: string) {
    return this.#scenario.repairs[stepId] ?? this.#scenario.repairs['repair'];
  }

  plan(): readonly LampStretch[] {
    return this.#shown;
  }

  /** What a meter that measures in `unit` finds where the probes are. Probes in the air, or on something else than it measures, are an open circuit. */
  measured(unit: string): Measured {
    const id = this.#checkId;
    const measurement = id === undefined ? undefined : this.#scenario.measurements[id];
    if (id === undefined || measurement === undefined || baseUnitOf(measurement.unit) !== unit) return 'overload';
    const values = this.#mended ? (measurement.after ?? measurement.before) : measurement.before;
    const taken = this.#taken.get(id) ?? 0;
    this.#taken.set(id, taken + 1);
    const value = values[Math.min(taken, values.length - 1)] ?? 'overload';
    return typeof value === 'number' ? convertUnit(value, measurement.unit, unit) : value;
  }

  #planFor(name: string, kind: 'capture' | 'watch'): readonly LampStretch[] {
    const { lampPlans, lampsAt } = this.#scenario;
    const at = this.#mended ? lampsAt.after : lampsAt.before;
    const plan = lampPlans[at[name] ?? name] ?? lampPlans[at[kind] ?? ''];
    if (plan === undefined) throw new BadInputError(`the scenario ${this.#scenario.name} does not say what the lamps show at '${name}'`);
    return plan;
  }
}
