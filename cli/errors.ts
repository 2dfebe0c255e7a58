/** Wrong usage, or an answer is needed and nobody is there to ask: exit 2. */
export class UsageError extends Error {
  override readonly name: string = 'UsageError';
}

/** A question with nobody at the terminal. `instead` names the option that answers it. */
export class NobodyToAskError extends UsageError {
  override readonly name = 'NobodyToAskError';
  constructor(question: string, instead: string) {
    super(`${question.trim()}${/[.?!:]$/.test(question.trim()) ? '' : '?'} Nobody is at a terminal to answer: ${instead}.`);
  }
}

/** Ctrl-C: what was recorded is kept. Exit 130. */
export class StoppedError extends Error {
  override readonly name = 'StoppedError';
  constructor(kept = 'Stopped. What was recorded is kept.') {
    super(kept);
  }
}

/** The server cannot be reached, or refuses: exit 5. `remedy` says who must do what. */
export class ServerError extends Error {
  override readonly name: string = 'ServerError';
  readonly remedy: string;
  constructor(what: string, remedy: string, options?: ErrorOptions) {
    super(what, options);
    this.remedy = remedy;
  }
}

export class ServerUnreachableError extends ServerError {
  override readonly name = 'ServerUnreachableError';
  /** It was reached, and did not answer in time. */
  readonly timedOut: boolean;
  constructor(server: string, why: string, { timedOut = false, ...options }: ErrorOptions & { timedOut?: boolean } = {}) {
    super(
      `The server at ${server} can't be reached: ${why}.`,
      'Start it, check the network, or say where it is with REFETTLE_SERVER.',
      options,
    );
    this.timedOut = timedOut;
  }
}

/** The server answered with a problem (RFC 9457): it is there, and it refuses. */
export class ApiProblemError extends ServerError {
  override readonly name = 'ApiProblemError';
  readonly status: number;
  /** `gate`, `conflict`, `same-serial` and so on; empty where the answer named none. */
  readonly kind: string;
  readonly errors: readonly { pointer: string; reason: string }[];
  /** The server's Retry-After, where it named one. */
  readonly retryAfterSeconds: number | undefined;
  /** The server's own time, of its Date header. */
  readonly serverTime: Date | undefined;
  constructor(problem: {
    status: number;
    kind: string;
    title: string;
    detail?: string | undefined;
    remedy: string;
    errors?: readonly { pointer: string; reason: string }[] | undefined;
    retryAfterSeconds?: number | undefined;
    serverTime?: Date | undefined;
  }) {
    // A detail that begins as the title does says it all.
    const { title, detail } = problem;
    super(detail === undefined || detail.startsWith(title) ? (detail ?? title) : `${title}: ${detail}`, problem.remedy);
    this.status = problem.status;
    this.kind = problem.kind;
    this.errors = problem.errors ?? [];
    this.retryAfterSeconds = problem.retryAfterSeconds;
    this.serverTime = problem.serverTime;
  }
}

export class NotSignedInError extends ServerError {
  override readonly name = 'NotSignedInError';
  constructor(server: string, why = 'nobody is signed in', remedy = 'Sign in: refettle sign-in') {
    super(`The server at ${server} refuses: ${why.replace(/\.$/, '')}.`, remedy);
  }
}

/** A name and a PIN that don't fit, at the server or at this bench. */
export class SignOnRefusedError extends ServerError {
  override readonly name = 'SignOnRefusedError';
  /** Another name or PIN may be right. */
  readonly tryAgain: boolean;
  constructor(what: string, { remedy, tryAgain }: { remedy: string; tryAgain: boolean }) {
    super(what, remedy);
    this.tryAgain = tryAgain;
  }
}
