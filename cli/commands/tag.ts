import { writeFileSync } from 'node:fs';
import type { TagPage } from '../../shared/api/tags.js';
import { unitPage } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { ApiProblemError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { notWritable } from '../home.js';
import { printJson } from '../render/json.js';
import { spread } from '../render/columns.js';
import { blankTagLines, tagLines } from '../render/tag-box.js';
import { unitLabel } from '../render/words.js';

export interface TagOptions {
  number: number;
  pdf?: string;
  json?: boolean;
}

/** The readiness tag of a unit; without one that stands, what is missing and how to get it. */
export async function runTag({ number, pdf, json }: TagOptions, context: Context): Promise<number> {
  const { stdout, stderr } = context;
  const page = await tagOf(context, number);
  const stands = page?.state.standing === 'stands';
  const style = await stdout.style();
  if (!page || !stands) {
    const { value: unit } = await unitPage(context, number);
    if (json === true) printJson(context, { unit: number, ready: false, ...(page ? { tag: page } : {}), readiness: unit.readiness });
    else {
      if (page) stdout.write(`${tagLines(page, style).join('\n')}\n\n`);
      stdout.write(`${blankTagLines(unit, style).join('\n')}\n`);
    }
    if (pdf !== undefined) stderr.say(`${unitLabel(number)} has no standing tag: no PDF was written.`);
    return EXIT.notGood;
  }
  if (json === true) printJson(context, { unit: number, ready: true, tag: page });
  else {
    stdout.write(`\n${tagLines(page, style).join('\n')}\n\n`);
    stdout.write(`${spread(' Says what this shop tested. Certifies no compliance.', 'exit 0', style.columns - 1)}\n`);
  }
  if (pdf !== undefined) {
    const { tagPdf } = await import('../render/tag-pdf.js');
    const bytes = await tagPdf(page);
    try {
      writeFileSync(pdf, bytes);
    } catch (error) {
      throw notWritable(pdf, error);
    }
    stderr.say(`The tag is in ${pdf}: A6, print it at 100 %.`);
  }
  return EXIT.good;
}

/** The newest tag; undefined for a unit that never had one. */
async function tagOf(context: Context, number: number): Promise<TagPage | undefined> {
  try {
    return await (await context.api()).call('getUnitTag', { params: { number } });
  } catch (error) {
    if (error instanceof ApiProblemError && error.status === 404) return undefined;
    throw error;
  }
}
