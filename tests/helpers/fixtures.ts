import { readFileSync } from 'node:fs';
import { readSheet } from '../../shared/sheet/read-sheet.js';
import type { Sheet, WeightedPhases } from '../../shared/sheet/schema.js';

const EXAMPLES = new URL('../fixtures/examples/', import.meta.url);

/** The text of a file in the fixtures' examples folder. */
export function exampleText(name: string): string {
  return readFileSync(new URL(name, EXAMPLES), 'utf8');
}

export function examplePath(name: string): string {
  return new URL(name, EXAMPLES).pathname;
}

/** The invented control family of the examples: five ready lamps, weights 1, 2, 4, 8, digits to 9. */
export const heron: Sheet = readSheet(exampleText('heron-h6.yaml'), 'heron-h6.yaml');
export const heronCoding = heron.coding as WeightedPhases;
