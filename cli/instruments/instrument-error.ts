/** Which instrument, on which port, and what a technician can do about it. */
export interface InstrumentPlace {
  instrument: string;
  port: string;
  toDo: string;
}

/** An instrument does not answer, or answers nonsense: exit 4. What it said is never a reading. */
export class InstrumentError extends Error {
  override readonly name: string = 'InstrumentError';
  readonly instrument: string;
  readonly port: string;
  readonly toDo: string;
  constructor(what: string, { instrument, port, toDo }: InstrumentPlace, options?: ErrorOptions) {
    super(`${instrument} on ${port}: ${what}`, options);
    this.instrument = instrument;
    this.port = port;
    this.toDo = toDo;
  }
}

/** Where something went wrong; each class knows what to do about it. */
export type Where = Omit<InstrumentPlace, 'toDo'>;

export class PortMissingError extends InstrumentError {
  override readonly name = 'PortMissingError';
  /** The ports that this machine has; `undefined` where nobody looked. */
  readonly present: readonly string[] | undefined;
  constructor(where: Where, present?: readonly string[], options?: ErrorOptions) {
    const there =
      present === undefined
        ? ''
        : present.length === 0
          ? ' This machine has no serial port at all now.'
          : ` There now: ${present.join(', ')}.`;
    super(
      'the port is not there',
      {
        ...where,
        toDo: `Plug the instrument in and switch it on, or correct its port in the rig file (refettle rig check finds it).${there}`,
      },
      options,
    );
    this.present = present;
  }
}

export class PortBusyError extends InstrumentError {
  override readonly name = 'PortBusyError';
  /** Who has it, as far as this machine tells: a program and its process number. */
  readonly holder: string | undefined;
  constructor(where: Where, holder?: string, options?: ErrorOptions) {
    super(
      holder === undefined ? 'another program has the port' : `the port is held by ${holder}`,
      {
        ...where,
        toDo:
          holder === undefined
            ? 'Close the other program (or the other terminal with a bench run) and try again.'
            : 'Close that program, or let it finish, and try again.',
      },
      options,
    );
    this.holder = holder;
  }
}

export class PermissionError extends InstrumentError {
  override readonly name = 'PermissionError';
  /** The group that may use the port. */
  readonly group: string;
  constructor(where: Where, group: string, options?: ErrorOptions) {
    super(
      `you may not use the port: it belongs to the group '${group}'`,
      { ...where, toDo: `Run 'sudo usermod -aG ${group} "$USER"', then sign out and in again.` },
      options,
    );
    this.group = group;
  }
}

export class DisconnectedError extends InstrumentError {
  override readonly name = 'DisconnectedError';
  constructor(where: Where, options?: ErrorOptions & { waitedSeconds?: number | undefined }) {
    const waited = options?.waitedSeconds;
    super(
      `it was unplugged or switched off${waited === undefined ? '' : ` and did not come back within ${waited} s`}`,
      { ...where, toDo: 'Check plug and supply, then repeat the step. What was recorded before is kept.' },
      options,
    );
  }
}

/** A measurement on a machine under voltage lost its instrument: it is not begun again behind a technician's back. */
export class TestBrokenOffError extends InstrumentError {
  override readonly name = 'TestBrokenOffError';
  constructor(where: Where, options?: ErrorOptions) {
    super(
      'it was unplugged in the middle of a measurement on a machine under voltage; it is back, and nothing is repeated by itself',
      { ...where, toDo: 'Isolate the machine, discharge it through the tester, see that the probes sit, then repeat the step.' },
      options,
    );
  }
}

export class PortClosedError extends InstrumentError {
  override readonly name = 'PortClosedError';
  constructor(where: Where) {
    super('the port was closed before it answered', { ...where, toDo: 'Repeat the step.' });
  }
}

export class InstrumentTimeoutError extends InstrumentError {
  override readonly name = 'InstrumentTimeoutError';
  readonly timeoutMs: number;
  constructor(where: Where, asked: string, timeoutMs: number) {
    super(`no answer to '${asked}' within ${timeoutMs} ms`, {
      ...where,
      toDo: 'Check that it is on, set to remote, and has the baud rate of the rig file. Then repeat the step.',
    });
    this.timeoutMs = timeoutMs;
  }
}

/** How much of a nonsense answer is shown: enough to recognise it, not enough to upset a terminal. */
const SHOWN_CHARACTERS = 60;
const shown = (answer: string): string => answer.replace(/[^\x20-\x7e]/g, '?').slice(0, SHOWN_CHARACTERS);

export class GarbageError extends InstrumentError {
  override readonly name: string = 'GarbageError';
  readonly answer: string;
  constructor(where: Where, asked: string, answer: string) {
    super(`'${asked}' was answered with '${shown(answer)}', which is nothing that can be read`, {
      ...where,
      toDo: 'Check the cable and the baud rate of the rig file. Then repeat the step.',
    });
    this.answer = answer;
  }
}

/** The line stopped in the middle: no line end came in time. Half a number looks like a whole one, so it is never one. */
export class HalfAnswerError extends InstrumentError {
  override readonly name = 'HalfAnswerError';
  readonly answer: string;
  constructor(where: Where, asked: string, answer: string, timeoutMs: number) {
    super(`half an answer came to '${asked}', '${shown(answer)}', and no line end within ${timeoutMs} ms`, {
      ...where,
      toDo: 'Check the cable, and that it ends its lines with LF. Then repeat the step.',
    });
    this.answer = answer;
  }
}

/** Only NULs or a line without end: a wrong baud rate, a cable in the air, another kind of device. */
export class NoLinesError extends InstrumentError {
  override readonly name = 'NoLinesError';
  readonly bytes: number;
  constructor(where: Where, asked: string, bytes: number) {
    super(`'${asked}' was answered with ${bytes} bytes that are no line (NULs, or a line without end)`, {
      ...where,
      toDo: 'Check the baud rate of the rig file, the cable, and that this is the instrument it says. Then repeat the step.',
    });
    this.bytes = bytes;
  }
}

/** Two different answers to one question: one of them may belong to an older question, and nobody can say which. */
export class TwoAnswersError extends InstrumentError {
  override readonly name = 'TwoAnswersError';
  constructor(where: Where, asked: string, answers: readonly string[]) {
    super(`'${asked}' was answered more than once, differently: ${answers.map((answer) => `'${shown(answer)}'`).join(', ')}`, {
      ...where,
      toDo: 'Switch its continuous output (talk only, auto print) off, let it settle, and repeat the step. None of these is a reading.',
    });
  }
}

/** The port answers as another instrument than the rig file says. */
export class WrongInstrumentError extends InstrumentError {
  override readonly name = 'WrongInstrumentError';
  readonly answered: string;
  constructor(where: Where, expected: string, answered: string, swappedWith?: string) {
    super(
      swappedWith === undefined
        ? `it should be '${shown(expected)}', and what answers there is '${shown(answered)}'`
        : `${where.instrument} and ${swappedWith} are swapped: what answers on this port is '${shown(answered)}'`,
      {
        ...where,
        toDo:
          swappedWith === undefined
            ? 'Plug the right instrument in, or write the new one into the rig file: refettle rig check'
            : 'Swap their plugs, or let the rig file follow: refettle rig check',
      },
    );
    this.answered = answered;
  }
}

/** It says who it is, and neither that it has sensors nor that it has none. */
export class ProbeOrMeterError extends InstrumentError {
  override readonly name = 'ProbeOrMeterError';
  constructor(where: Where, asked: string) {
    super(`it answers to '*IDN?', and neither answers nor refuses '${asked}': whether it is a probe or a meter is not known`, {
      ...where,
      toDo: 'Check its cable and ask again; or write it into the rig file by hand.',
    });
  }
}

/** The probe was started and sends no samples. */
export class ProbeSilentError extends InstrumentError {
  override readonly name = 'ProbeSilentError';
  constructor(where: Where, seconds: number, answers: boolean) {
    super(`the probe has sent no sample for ${seconds} s${answers ? ', although it answers' : ', and no longer answers'}`, {
      ...where,
      toDo: answers
        ? 'Switch the probe off and on again, then repeat the step. What was recorded before is kept.'
        : 'Check its supply and cable, then repeat the step. What was recorded before is kept.',
    });
  }
}

/** An instrument's lines are all damaged: nothing of it can be believed. */
export class DamagedLinesError extends InstrumentError {
  override readonly name = 'DamagedLinesError';
  constructor(where: Where, lines: number, seconds: number) {
    super(`none of the ${lines} lines that came within ${seconds} s is whole`, {
      ...where,
      toDo: 'Check the cable, the baud rate and the number of sensors. Then repeat the step. What was recorded before is kept.',
    });
  }
}

export class OverloadError extends InstrumentError {
  override readonly name = 'OverloadError';
  readonly sign: 1 | -1;
  constructor(where: Where, sign: 1 | -1) {
    super(`overload${sign < 0 ? ' (negative)' : ''}: there is no reading`, {
      ...where,
      toDo: 'Check the leads and the range. An open circuit shows as overload: if the part is open, record it as an inspection.',
    });
    this.sign = sign;
  }
}

export class NotANumberError extends InstrumentError {
  override readonly name = 'NotANumberError';
  constructor(where: Where) {
    super('it says that it has no number (SCPI 9.91E37): there is no reading', {
      ...where,
      toDo: 'Let the instrument settle, check its function and range, and measure again.',
    });
  }
}

/** The instrument refused a command and says why. */
export class InstrumentRefusalError extends InstrumentError {
  override readonly name = 'InstrumentRefusalError';
  readonly number: number;
  constructor(where: Where, asked: string, error: { number: number; text: string; info: string | undefined }, answer?: string) {
    const why = `${error.number}, ${error.text}${error.info === undefined ? '' : ` (${error.info})`}`;
    super(
      answer === undefined
        ? `it refused '${asked}': ${why}`
        : `it answered '${asked}' with '${shown(answer)}' and reports an error: ${why}`,
      {
        ...where,
        toDo: 'Check in the rig file that this instrument can do this.',
      },
    );
    this.number = error.number;
  }
}
