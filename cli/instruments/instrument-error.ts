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
  constructor(where: Where, options?: ErrorOptions) {
    super(
      'the port is not there',
      { ...where, toDo: 'Plug the instrument in and switch it on, or correct its port in the rig file.' },
      options,
    );
  }
}

export class PortBusyError extends InstrumentError {
  override readonly name = 'PortBusyError';
  constructor(where: Where, options?: ErrorOptions) {
    super(
      'another program has the port',
      { ...where, toDo: 'Close the other program (or the other terminal with a bench run) and try again.' },
      options,
    );
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
  constructor(where: Where, options?: ErrorOptions) {
    super(
      'it was unplugged or switched off',
      { ...where, toDo: 'Check plug and supply, then repeat the step. What was recorded before is kept.' },
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

export class GarbageError extends InstrumentError {
  override readonly name = 'GarbageError';
  readonly answer: string;
  constructor(where: Where, asked: string, answer: string) {
    const shown = answer.replace(/[^\x20-\x7e]/g, '?').slice(0, SHOWN_CHARACTERS);
    super(`'${asked}' was answered with '${shown}', which is nothing that can be read`, {
      ...where,
      toDo: 'Check the cable and the baud rate of the rig file. Then repeat the step.',
    });
    this.answer = answer;
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
  constructor(where: Where, asked: string, error: { number: number; text: string; info: string | undefined }) {
    super(`it refused '${asked}': ${error.number}, ${error.text}${error.info === undefined ? '' : ` (${error.info})`}`, {
      ...where,
      toDo: 'Check in the rig file that this instrument can do this.',
    });
    this.number = error.number;
  }
}
