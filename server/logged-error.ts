import type { SerializedError } from 'pino';

/**
 * What the log keeps of an error. PostgreSQL's `detail` and `where` repeat whole rows (addresses, hashes of passwords), so nothing goes in
 * but what is named here.
 */
export function loggedError({ type, message, stack, code, table, column, constraint }: SerializedError): Record<string, unknown> {
  return {
    type,
    message,
    stack,
    code: code as unknown,
    table: table as unknown,
    column: column as unknown,
    constraint: constraint as unknown,
  };
}
