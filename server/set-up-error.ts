/** What stops Refettle from starting, said so that the reader can mend it: `message` is what happened and where, `remedy` what to do. */
export class SetUpError extends Error {
  override readonly name = 'SetUpError';
  constructor(
    message: string,
    readonly remedy: string,
    options?: ErrorOptions,
  ) {
    super(message, options);
  }
}
