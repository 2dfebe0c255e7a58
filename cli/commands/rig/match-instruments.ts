import { usualBaudRate } from '../../instruments/assemble-rig.js';
import type { PortAnswer } from '../../instruments/ask-port.js';
import { isSameInstrument } from '../../instruments/identity.js';
import { deviceOf } from '../../instruments/port-holder.js';
import type { Rig, RigInstrument } from '../../instruments/rig-file.js';

export type Answering = Extract<PortAnswer, { state: 'answers' }>;

/** An instrument that answered, as it should stand in the rig file, and how that differs from what stood there. */
export interface Found {
  instrument: RigInstrument;
  answer: Answering;
  /** `named`: the file did not say yet what it answers. */
  standing: 'as written' | 'named' | 'moved' | 'new';
  before?: RigInstrument;
}

export interface Matched {
  found: Found[];
  /** Of the rig file, and answering nowhere; they stay in it. */
  missing: RigInstrument[];
}

/**
 * Holds what answered against the rig file: an instrument is known by what it says it is, and where the file does not say that, by its
 * port and its kind. What the file knows of it (id, accuracies, sensors) is kept; port, speed and identification are renewed.
 */
export function matchInstruments(rig: Pick<Rig, 'instruments'>, answers: readonly PortAnswer[]): Matched {
  const free = new Set(rig.instruments);
  const answering = answers.filter((answer) => answer.state === 'answers');
  const taken = new Map<Answering, RigInstrument>();
  const take = (answer: Answering, fits: (instrument: RigInstrument) => boolean): void => {
    const instrument = taken.has(answer) ? undefined : [...free].find((one) => isProbe(one) === isProbeAnswer(answer) && fits(one));
    if (instrument === undefined) return;
    free.delete(instrument);
    taken.set(answer, instrument);
  };
  // Every known name first: a port alone may be the plug of somebody else.
  for (const answer of answering)
    take(answer, (one) => one.identification !== undefined && isSameInstrument(one.identification, answer.identification));
  for (const answer of answering) take(answer, (one) => one.identification === undefined && deviceOf(one.port) === deviceOf(answer.port));

  const ids = new Set(rig.instruments.map(({ id }) => id));
  const found = answering.map((answer): Found => {
    const before = taken.get(answer);
    if (before === undefined) return { instrument: newInstrument(answer, ids), answer, standing: 'new' };
    const moved = deviceOf(before.port) !== deviceOf(answer.port);
    return {
      instrument: renewed(before, answer),
      answer,
      before,
      standing: moved ? 'moved' : before.identification === undefined ? 'named' : 'as written',
    };
  });
  return { found, missing: [...free] };
}

const isProbe = ({ kind }: RigInstrument): boolean => kind === 'light-probe';
const isProbeAnswer = ({ sensorCount }: Answering): boolean => sensorCount !== undefined;

function renewed(before: RigInstrument, { port, baudRate, identification }: Answering): RigInstrument {
  const { baudRate: _before, ...rest } = before;
  return { ...rest, port, identification, ...(baudRate === usualBaudRate(before) ? {} : { baudRate }) };
}

/** What is known of an instrument that nobody has written down: a meter measures nothing yet, until its accuracy is given. */
function newInstrument({ port, baudRate, identification, sensorCount }: Answering, ids: Set<string>): RigInstrument {
  const kind = sensorCount === undefined ? 'meter' : 'light-probe';
  const letter = kind === 'meter' ? 'M' : 'P';
  let number = 1;
  const idOf = (): string => `${letter}-${String(number).padStart(2, '0')}`;
  while (ids.has(idOf())) number += 1;
  const id = idOf();
  ids.add(id);
  const base = { id, port, identification, ...(baudRate === usualBaudRate({ kind }) ? {} : { baudRate }) };
  return kind === 'meter' ? { ...base, kind, accuracy: {} } : { ...base, kind };
}
