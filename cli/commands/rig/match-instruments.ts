import { usualBaudRate } from '../../instruments/assemble-rig.js';
import type { PortAnswer } from '../../instruments/ask-port.js';
import { likenessOf } from '../../instruments/identity.js';
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

/** An instrument that answered and may be any of several of the rig file: which one, a person must say. */
export interface Unclear {
  answer: Answering;
  candidates: RigInstrument[];
}

export interface Matched {
  found: Found[];
  unclear: Unclear[];
  /** Of the rig file, and answering nowhere; they stay in it. */
  missing: RigInstrument[];
}

/**
 * Holds what answered against the rig file. An instrument is known by its serial number, wherever it hangs; without one, by where it
 * hangs; and elsewhere only if nothing else can be meant, for two of one model that say no serial number look the same. What the file
 * knows of it (id, accuracies, sensors) is kept; port, speed and identification are renewed.
 */
export function matchInstruments(rig: Pick<Rig, 'instruments'>, answers: readonly PortAnswer[]): Matched {
  const answering = answers.filter((answer) => answer.state === 'answers');
  const free = new Set(rig.instruments);
  const open = new Set(answering);
  const taken = new Map<Answering, RigInstrument>();
  const take = (answer: Answering, instrument: RigInstrument): void => {
    free.delete(instrument);
    open.delete(answer);
    taken.set(answer, instrument);
  };
  const fitting = (answer: Answering, fits: Fits): RigInstrument[] =>
    [...free].filter((one) => isProbe(one) === isProbeAnswer(answer) && fits(one, answer));
  const takeHere = (fits: Fits): void => {
    for (const answer of open) {
      const [here] = fitting(answer, (one) => hangsThere(one, answer) && fits(one, answer));
      if (here) take(answer, here);
    }
  };
  const takeTheOnly = (fits: Fits): void => {
    const candidates = [...open].map((answer) => ({ answer, fit: fitting(answer, fits) }));
    for (const { answer, fit } of candidates) {
      const [only] = fit;
      if (only && fit.length === 1 && candidates.filter((other) => other.fit.includes(only)).length === 1) take(answer, only);
    }
  };
  takeHere(isSurely);
  takeTheOnly(isSurely);
  takeHere(isAlike);
  takeTheOnly(mayBe);

  const unclear = [...open].flatMap((answer) => {
    const candidates = fitting(answer, mayBe);
    return candidates.length === 0 ? [] : [{ answer, candidates }];
  });
  const ids = new Set(rig.instruments.map(({ id }) => id));
  const found = answering
    .filter((answer) => !unclear.some((one) => one.answer === answer))
    .map((answer) => foundAs(taken.get(answer), answer, ids));
  return { found, unclear, missing: [...free].filter((one) => !unclear.some(({ candidates }) => candidates.includes(one))) };
}

/** What answered, as one of the rig file or as a new one. `ids` are those that are given; a new one's is added. */
export function foundAs(before: RigInstrument | undefined, answer: Answering, ids: Set<string>): Found {
  if (before === undefined) return { instrument: newInstrument(answer, ids), answer, standing: 'new' };
  const moved = !hangsThere(before, answer);
  return {
    instrument: renewed(before, answer),
    answer,
    before,
    standing: moved ? 'moved' : before.identification === undefined ? 'named' : 'as written',
  };
}

type Fits = (instrument: RigInstrument, answer: Answering) => boolean;

const hangsThere: Fits = ({ port }, answer) => deviceOf(port) === deviceOf(answer.port);
const isSurely: Fits = ({ identification }, answer) =>
  identification !== undefined && likenessOf(identification, answer.identification) === 'sure';
const isAlike: Fits = ({ identification }, answer) =>
  identification !== undefined && likenessOf(identification, answer.identification) !== 'different';
/** Where the file does not say what it answers, its port is all that tells. */
const mayBe: Fits = (one, answer) => (one.identification === undefined ? hangsThere(one, answer) : isAlike(one, answer));

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
