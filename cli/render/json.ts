import type { Context } from '../context.js';

/** One line of JSON on standard output, and nothing else there. */
export function printJson({ stdout }: Pick<Context, 'stdout'>, value: unknown): void {
  stdout.writeExactly(`${JSON.stringify(value)}\n`);
}
