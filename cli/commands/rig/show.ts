import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { usualBaudRate } from '../../instruments/assemble-rig.js';
import { loadRig, RIG_FILE, type Rig, type RigInstrument } from '../../instruments/rig-file.js';
import { SIMULATED_PREFIX } from '../../instruments/rig.js';
import { printJson } from '../../render/json.js';

/** The rig of this bench, as it is understood: what the file leaves out is filled in. Opens no port. */
export async function runRigShow({ rig: choice, json }: { rig?: string; json?: boolean }, context: Context): Promise<number> {
  const simulated = choice?.startsWith(SIMULATED_PREFIX) === true;
  const rig = simulated
    ? await (await import('../../instruments/simulated/simulated-rig.js')).simulatedRigFile(choice.slice(SIMULATED_PREFIX.length))
    : await loadRig(context.home.folder, choice);
  const instruments = rig.instruments.map((one) => ({ ...one, baudRate: one.baudRate ?? usualBaudRate(one) }));
  if (json === true) {
    printJson(context, { file: simulated ? null : (choice ?? context.home.path(RIG_FILE)), simulated, ...rig, instruments });
    return EXIT.good;
  }
  const { ink } = await context.stdout.style();
  const lines = [
    `${ink.bold(rig.name)}  ${rig.sampleRateHz} samples a second, full scale ${rig.scaleMax}, ${waiting(rig)}`,
    ...instruments.flatMap((one) => [
      '',
      `${ink.bold(one.id)}  ${one.kind.replace('-', ' ')}`,
      `  ${one.port}, ${one.baudRate} baud`,
      `  ${one.identification ?? 'what it answers is not written down: refettle rig check'}`,
      ...does(one).map((line) => `  ${line}`),
    ]),
  ];
  context.stdout.write(`${lines.join('\n')}\n`);
  return EXIT.good;
}

const waiting = ({ reconnectSeconds }: Rig): string =>
  reconnectSeconds === 0 ? 'unplugged instruments are not waited for' : `unplugged instruments are waited for ${reconnectSeconds} s`;

function does(instrument: RigInstrument): string[] {
  if (instrument.kind === 'light-probe')
    return [instrument.sensors === undefined ? 'sensors in panel order' : `sensors: ${instrument.sensors.join(', ')}`];
  const specifications = Object.entries(instrument.accuracy);
  if (specifications.length === 0) return ['measures nothing yet: its accuracy is not written down'];
  return specifications.flatMap(([quantity, { unit, ranges }]) =>
    ranges.map(
      ({ upTo, accuracy, resolution }) =>
        `${quantity}${upTo === undefined ? '' : ` up to ${upTo} ${unit}`}: ±(${accuracy.replace(/^±?\(?|\)$/g, '')}), last digit ${resolution} ${unit}`,
    ),
  );
}
