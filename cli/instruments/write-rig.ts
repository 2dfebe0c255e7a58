import { stringify } from 'yaml';
import type { Rig, RigInstrument, Specification } from './rig-file.js';

const HEAD = '# The instruments of this bench and the ports they hang on. Written by refettle rig check; yours to change.\n';
const YAML_WIDTH = 140;

/** A rig as the text of its file. What is as usual is left out; reading the text gives the same rig. */
export function rigText(rig: Rig): string {
  const { format, version, name, scaleMax, sampleRateHz, reconnectSeconds, instruments } = rig;
  const head = { format, version, name, scaleMax, sampleRateHz, reconnectSeconds };
  return HEAD + stringify({ ...head, instruments: instruments.map(written) }, { lineWidth: YAML_WIDTH });
}

function written(instrument: RigInstrument): Record<string, unknown> {
  const { id, kind, port, baudRate, identification } = instrument;
  const about = {
    id,
    kind,
    port,
    ...(baudRate === undefined ? {} : { baudRate }),
    ...(identification === undefined ? {} : { identification }),
  };
  if (instrument.kind === 'light-probe') return { ...about, ...(instrument.sensors === undefined ? {} : { sensors: instrument.sensors }) };
  const { measureTimeoutMs, accuracy } = instrument;
  return {
    ...about,
    ...(measureTimeoutMs === undefined ? {} : { measureTimeoutMs }),
    accuracy: Object.fromEntries(Object.entries(accuracy).map(([quantity, specification]) => [quantity, specified(specification)])),
  };
}

/** A meter of one range is written as its data sheet has it: straight away. */
function specified({ unit, ranges, overloadFrom }: Specification): Record<string, unknown> {
  const rest = overloadFrom === undefined ? {} : { overloadFrom };
  const [only] = ranges;
  if (ranges.length === 1 && only !== undefined && only.upTo === undefined)
    return { unit, accuracy: only.accuracy, resolution: only.resolution, ...rest };
  return { unit, ranges, ...rest };
}
