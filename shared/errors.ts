/** Bad input: a file, a sheet, a script or a value. The terminal exits 3, the API answers 422. */
export class BadInputError extends Error {
  override readonly name = 'BadInputError';
  /** Where: a file's name, and the line in it (1-based) where one is at fault. */
  readonly file: string | undefined;
  readonly line: number | undefined;
  constructor(reason: string, where: { file?: string; line?: number } = {}) {
    super(reason);
    this.file = where.file;
    this.line = where.line;
  }
}

/** What the program does not do yet, said clearly instead of guessed at. The terminal exits 3. */
export class NotYetError extends BadInputError {}
