import { LineCounter, isNode, parseDocument } from 'yaml';
import { BadInputError } from '../errors.js';
import { scriptSchema, type Script } from './schema.js';

/** YAML aliases are counted, so that a few lines can't grow into gigabytes. */
const ALIASES_AT_MOST = 50;

/**
 * Reads a bench script from YAML 1.2 (core schema: `on` and `off` are words) or JSON text.
 *
 * Checks the form only; whether the script fits a service sheet says `checkScript`.
 * Refuses with a BadInputError that names file, line (1-based), the place in the script and the reason.
 *
 * @example readScript(text, 'h6-prove.yaml').prove // true
 */
export function readScript(text: string, fileName?: string): Script {
  const lineCounter = new LineCounter();
  const document = parseDocument(text, { version: '1.2', schema: 'core', uniqueKeys: true, lineCounter });
  const fail = (reason: string, line?: number): never => {
    throw new BadInputError(reason, { ...(fileName === undefined ? {} : { file: fileName }), ...(line === undefined ? {} : { line }) });
  };
  const firstLine = (message: string): string => message.split('\n')[0] ?? message;
  const syntax = document.errors[0];
  if (syntax !== undefined) fail(`the script is no YAML or JSON: ${firstLine(syntax.message)}`, lineCounter.linePos(syntax.pos[0]).line);

  let plain: unknown;
  try {
    plain = document.toJS({ maxAliasCount: ALIASES_AT_MOST });
  } catch (error) {
    fail(`the script can't be read: ${error instanceof Error ? firstLine(error.message) : 'aliases without end'}`);
  }
  const parsed = scriptSchema.safeParse(plain);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0];
  const path = (issue?.path ?? []).filter((part) => typeof part !== 'symbol');
  let line: number | undefined;
  for (let length = path.length; length >= 0 && line === undefined; length -= 1) {
    const node: unknown = length === 0 ? document.contents : document.getIn(path.slice(0, length), true);
    if (isNode(node) && node.range) line = lineCounter.linePos(node.range[0]).line;
  }
  return fail(`${path.length === 0 ? '' : `${path.join('.')}: `}${issue?.message ?? 'unreadable'}`, line);
}
