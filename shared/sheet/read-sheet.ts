import { LineCounter, isNode, parseDocument, type Document } from 'yaml';
import { BadInputError } from '../errors.js';
import { checkSheet } from './check-sheet.js';
import { sheetSchema, type Sheet } from './schema.js';

/** Where a part of the sheet stands: keys and indexes from the top. */
export type SheetPath = readonly (string | number)[];

/**
 * Reads a service sheet from YAML 1.2 (core schema: `on` and `off` are words) or JSON text.
 *
 * Checks the schema, then what the schema can't see: ids that no lamp has, the same id, weight or code twice, a check without limits.
 * Refuses with a BadInputError that names file, line (1-based), the place in the sheet and the reason.
 *
 * @example readSheet(text, 'heron-h6.yaml').family // 'heron-h6'
 */
export function readSheet(text: string, fileName?: string): Sheet {
  const lineCounter = new LineCounter();
  const document = parseDocument(text, { version: '1.2', schema: 'core', uniqueKeys: true, lineCounter });
  const fail = (reason: string, line?: number): never => {
    throw new BadInputError(reason, { ...(fileName === undefined ? {} : { file: fileName }), ...(line === undefined ? {} : { line }) });
  };
  const syntax = document.errors[0];
  if (syntax !== undefined) fail(`the sheet is no YAML or JSON: ${firstLineOf(syntax.message)}`, lineCounter.linePos(syntax.pos[0]).line);
  if (document.contents === null) fail('the sheet is empty: it begins with format: refettle.sheet', 1);

  const lineOf = (path: SheetPath): number | undefined => lineAt(document, lineCounter, path);
  const parsed = sheetSchema.safeParse(toPlain(document, fail));
  if (!parsed.success) {
    const issue = parsed.error.issues[0];
    const path = (issue?.path ?? []).filter((part) => typeof part !== 'symbol');
    return fail(`${where(path)}${issue?.message ?? 'unreadable'}`, lineOf(path));
  }
  const finding = checkSheet(parsed.data).find(({ severity }) => severity === 'error');
  if (finding !== undefined) fail(`${where(finding.path)}${finding.reason}`, lineOf(finding.path));
  return parsed.data;
}

function toPlain(document: Document, fail: (reason: string) => never): unknown {
  try {
    // Aliases are counted, so that a few lines can't grow into gigabytes.
    return document.toJS({ maxAliasCount: 50 });
  } catch (error) {
    return fail(`the sheet can't be read: ${error instanceof Error ? firstLineOf(error.message) : 'aliases without end'}`);
  }
}

/** The line of the innermost part of the path that stands in the text. */
function lineAt(document: Document, lineCounter: LineCounter, path: SheetPath): number | undefined {
  for (let length = path.length; length >= 0; length -= 1) {
    const node: unknown = length === 0 ? document.contents : document.getIn(path.slice(0, length), true);
    if (isNode(node) && node.range) return lineCounter.linePos(node.range[0]).line;
  }
  return undefined;
}

function where(path: SheetPath): string {
  return path.length === 0 ? '' : `${path.join('.')}: `;
}

function firstLineOf(message: string): string {
  return message.split('\n')[0]?.replace(/:$/, '') ?? message;
}
