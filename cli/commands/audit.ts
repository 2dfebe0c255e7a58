import { createWriteStream, renameSync, rmSync, statSync } from 'node:fs';
import { resolve } from 'node:path';
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { AUDIT_WHATS, AUDIT_WORDS, type AuditFilter, type AuditRow } from '../../shared/api/audit.js';
import type { Context } from '../context.js';
import { ServerError, StoppedError, UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { notWritable } from '../home.js';
import { printJson } from '../render/json.js';
import { dayText, timeText } from '../render/words.js';

export interface AuditOptions {
  who?: string;
  what?: string;
  subject?: string;
  from?: string;
  to?: string;
  limit?: number;
  csv?: string;
  json?: boolean;
}

const USUAL_LIMIT = 50;
const LARGEST_PAGE = 200;

/** Who changed what, when, before and after; newest first, or all of it as CSV. */
export async function runAudit(options: AuditOptions, context: Context): Promise<number> {
  const filter = filterOf(options);
  return options.csv === undefined ? show(filter, options, context) : writeCsv(filter, options.csv, options, context);
}

function filterOf({ who, what, subject, from, to }: AuditOptions): AuditFilter {
  const known = AUDIT_WHATS.find((one) => one === what);
  if (what !== undefined && known === undefined) throw new UsageError(`--what: '${what}' is none of ${AUDIT_WHATS.join(', ')}`);
  return {
    ...(who === undefined ? {} : { who }),
    ...(known === undefined ? {} : { what: known }),
    ...(subject === undefined ? {} : { subject }),
    ...(from === undefined ? {} : { from: moment('--from', from, 0) }),
    ...(to === undefined ? {} : { to: moment('--to', to, 1) }),
  };
}

/** A moment as it is, or a day by the clock on the wall: from its begin, to its end. */
function moment(option: string, text: string, daysLater: number): string {
  const day = /^(\d{4})-(\d\d)-(\d\d)$/.exec(text.trim());
  const at = day ? new Date(Number(day[1]), Number(day[2]) - 1, Number(day[3]) + daysLater) : new Date(text);
  if (Number.isNaN(at.getTime())) throw new UsageError(`${option}: '${text}' is no time. Write it like 2026-03-05, or 2026-03-05T09:00Z`);
  return at.toISOString();
}

async function show(filter: AuditFilter, { limit = USUAL_LIMIT, json }: AuditOptions, context: Context): Promise<number> {
  const api = await context.api();
  const rows: AuditRow[] = [];
  let next: string | undefined;
  do {
    const query = { ...filter, limit: Math.min(LARGEST_PAGE, limit - rows.length), cursor: next };
    const page = await api.call('listAudit', { query });
    rows.push(...page.items);
    next = page.next;
  } while (next !== undefined && rows.length < limit);
  if (json === true) {
    printJson(context, { items: rows, more: next !== undefined });
    return EXIT.good;
  }
  if (rows.length === 0) context.stderr.write('Nothing like that is in the log.\n');
  const { ink } = await context.stdout.style();
  for (const row of rows) {
    const { at, who, what, subject } = row;
    context.stdout.say(`${dayText(at)}, ${timeText(at)}  ${ink.bold(who?.name ?? 'nobody')} ${AUDIT_WORDS[what]}: ${subject.name}`);
    const changes = changesText(row);
    if (changes !== '') context.stdout.say(`    ${changes}`);
  }
  if (next !== undefined) context.stderr.say(`There is more: ask with --limit ${limit * 2}, or take all of it with --csv FILE.`);
  return EXIT.good;
}

/** `role technician → lead`: each value before and after. */
function changesText({ before = {}, after = {} }: AuditRow): string {
  const text = (value: unknown): string => (typeof value === 'string' ? value : JSON.stringify(value));
  return [...new Set([...Object.keys(before), ...Object.keys(after)])]
    .map((name) => {
      if (!(name in before)) return `${name}: ${text(after[name])}`;
      return `${name}: ${text(before[name])} -> ${name in after ? text(after[name]) : 'nothing'}`;
    })
    .join('; ');
}

/** All of it, oldest first, as RFC 4180. The file is there whole or not at all; `-` is standard output. */
async function writeCsv(filter: AuditFilter, csv: string, { json }: AuditOptions, context: Context): Promise<number> {
  const pieces = (await context.api()).pieces('exportAudit', { query: filter });
  if (csv === '-') {
    if (json === true) throw new UsageError('--csv - and --json both want standard output: take one.');
    const decoder = new TextDecoder();
    for await (const piece of pieces) context.stdout.writeExactly(decoder.decode(piece, { stream: true }));
    return EXIT.good;
  }
  const file = resolve(csv);
  const beside = `${file}.${process.pid}.new`;
  try {
    await pipeline(Readable.from(pieces), createWriteStream(beside, { mode: 0o600 }));
    renameSync(beside, file);
  } catch (error) {
    rmSync(beside, { force: true });
    if (error instanceof ServerError || error instanceof StoppedError) throw error;
    throw notWritable(file, error);
  }
  const { size } = statSync(file);
  if (json === true) printJson(context, { file, bytes: size });
  else context.stdout.write(`The log is in ${csv}.\n`);
  return EXIT.good;
}
