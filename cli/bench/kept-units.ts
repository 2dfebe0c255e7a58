import { filesIn, readIfThere, writeWhole, type Home } from '../home.js';

/** What a bench keeps of the list of units, to name them without the network. */
export interface KeptUnit {
  number: number;
  machine: string;
  stage: string;
  family?: string | undefined;
  waitsFor?: string | undefined;
}

const LIST = ['cache', 'unit-list.json'] as const;

/** A row of the API's list, as far as it is kept. */
interface Row {
  number: number;
  plate: { maker: string; model: string };
  stage: string;
  family?: string | undefined;
  waitsFor: string;
}

/** Keeps the newest units of a list that came without a search, and when it was. */
export function keepUnits(home: Home, rows: readonly Row[], at: Date): void {
  const units = rows.map(({ number, plate, stage, family, waitsFor }): KeptUnit => {
    return { number, machine: `${plate.maker} ${plate.model}`, stage, family, waitsFor };
  });
  writeWhole(home.path(...LIST), JSON.stringify({ at: at.toISOString(), units }));
}

/**
 * The units this bench knows of: the list as it was kept, and each unit it has worked on; newest first.
 * Read without a schema, because completion has no time for one: whatever has not the right form is passed over.
 */
export function keptUnits(home: Home): { at: string | undefined; units: KeptUnit[] } {
  const list = jsonIn(home.path(...LIST)) as { at?: unknown; units?: unknown } | undefined;
  const units = new Map<number, KeptUnit>();
  for (const unit of Array.isArray(list?.units) ? (list.units as unknown[]) : []) if (isKept(unit)) units.set(unit.number, unit);
  for (const name of filesIn(home.path('cache', 'units'))) {
    const number = Number(/^(\d+)\.json$/.exec(name)?.[1]);
    if (!Number.isInteger(number) || units.has(number)) continue;
    const page = jsonIn(home.path('cache', 'units', name)) as { unit?: Partial<Row>; stage?: string } | undefined;
    const { plate, family } = page?.unit ?? {};
    if (plate) units.set(number, { number, machine: `${plate.maker} ${plate.model}`, stage: String(page?.stage), family });
  }
  const at = typeof list?.at === 'string' ? list.at : undefined;
  return { at, units: [...units.values()].sort((a, b) => b.number - a.number) };
}

function isKept(value: unknown): value is KeptUnit {
  const unit = value as Partial<KeptUnit> | null;
  return typeof unit?.number === 'number' && typeof unit.machine === 'string' && typeof unit.stage === 'string';
}

/** The checks of a family's sheet, as it was kept. */
export function keptChecks(home: Home, family: string): { id: string; title: string; kind: string }[] {
  const page = jsonIn(home.path('cache', 'sheets', `${encodeURIComponent(family)}.json`)) as { sheet?: { checks?: unknown } } | undefined;
  const checks = Array.isArray(page?.sheet?.checks) ? (page.sheet.checks as Record<string, unknown>[]) : [];
  const text = (value: unknown): string => (typeof value === 'string' ? value : '');
  return checks.flatMap(({ id, title, kind }) => (text(id) === '' ? [] : [{ id: text(id), title: text(title), kind: text(kind) }]));
}

/** The control families whose sheets this bench has kept, or that its units have. */
export function keptFamilies(home: Home): string[] {
  const sheets = filesIn(home.path('cache', 'sheets')).map((name) => decodeURIComponent(name.replace(/\.json$/, '')));
  const ofUnits = keptUnits(home).units.flatMap(({ family }) => family ?? []);
  return [...new Set([...sheets, ...ofUnits])].sort();
}

function jsonIn(file: string): unknown {
  try {
    return JSON.parse(readIfThere(file) ?? 'null') ?? undefined;
  } catch {
    return undefined;
  }
}
