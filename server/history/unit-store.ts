import { z } from 'zod';
import { roleSchema } from '../../shared/api/roles.js';
import { unitSchema, type Unit } from '../../shared/api/units.js';
import { stageSchema, type Stage } from '../../shared/readiness/stage.js';
import type { Db } from '../db.js';

const optional = <T extends z.ZodType>(schema: T) => schema.nullable().transform((value) => value ?? undefined);

/** A row as PostgreSQL gives it, with the name of who took the unit in. */
const unitRowSchema = z
  .object({
    id: z.string(),
    number: z.number(),
    appliance: z.string(),
    maker: z.string(),
    model: z.string(),
    serial: optional(z.string()),
    plate_unreadable: z.boolean(),
    protection_class: z.string(),
    volts: optional(z.number()),
    hertz: optional(z.number()),
    watts: optional(z.number()),
    amperes: optional(z.number()),
    mass_kg: optional(z.number()),
    family: optional(z.string()),
    complaint: z.string(),
    source: optional(z.string()),
    cost_minor: z.number(),
    licensed_only: z.boolean(),
    taken_in_at: z.date(),
    taken_in_by: z.string(),
    taken_in_by_role: roleSchema,
    taken_in_by_name: z.string(),
    same_serial_reason: optional(z.string()),
    same_serial_units: optional(z.array(z.number())),
    stage: stageSchema,
  })
  .transform((row): { unit: Unit; stage: Stage } => {
    const { maker, model, serial, volts, hertz, watts, amperes } = row;
    const plate = {
      maker,
      model,
      serial,
      plateUnreadable: row.plate_unreadable,
      protectionClass: row.protection_class,
      volts,
      hertz,
      watts,
      amperes,
      massKg: row.mass_kg,
    };
    const unit = unitSchema.parse({
      id: row.id,
      number: row.number,
      appliance: row.appliance,
      plate: withoutUndefined(plate),
      ...withoutUndefined({ family: row.family, source: row.source }),
      complaint: row.complaint,
      costMinor: row.cost_minor,
      licensedOnly: row.licensed_only,
      takenInAt: row.taken_in_at.toISOString(),
      takenInBy: { id: row.taken_in_by, name: row.taken_in_by_name, role: row.taken_in_by_role },
      ...(row.same_serial_reason === undefined
        ? {}
        : { sameSerial: { reason: row.same_serial_reason, units: row.same_serial_units ?? [] } }),
    });
    return { unit, stage: row.stage };
  });

function withoutUndefined<T extends object>(value: T): Partial<T> {
  return Object.fromEntries(Object.entries(value).filter(([, inner]) => inner !== undefined)) as Partial<T>;
}

const unitRows = (db: Db) =>
  db('units').join('people', 'people.id', 'units.taken_in_by').select('units.*', 'people.name as taken_in_by_name');

export async function findUnit(db: Db, number: number): Promise<Unit | undefined> {
  const row: unknown = await unitRows(db).where({ number }).first();
  return row === undefined ? undefined : unitRowSchema.parse(row).unit;
}

/**
 * Every write on a unit holds its row first, so that a sign-off and a failed reading come one after the other, and the second
 * one sees the first. Several are locked in the order of their numbers: two writers never wait for each other.
 */
export async function lockUnits(db: Db, numbers: readonly number[]): Promise<Map<number, Unit>> {
  const rows: unknown[] = await unitRows(db)
    .whereIn('number', [...numbers])
    .orderBy('number')
    .forUpdate('units');
  return new Map(rows.map((row) => unitRowSchema.parse(row).unit).map((unit) => [unit.number, unit]));
}

export async function nextUnitNumber(db: Db): Promise<number> {
  const { rows } = await db.raw<{ rows: unknown[] }>("select nextval('unit_numbers') as number");
  return z.object({ number: z.number() }).parse(rows[0]).number;
}

/** Upper case, no blanks, no hyphens: as two people read the same plate. */
export const serialKey = (serial: string): string =>
  serial
    .normalize('NFKC')
    .toUpperCase()
    .replace(/[\s\p{Pd}]/gu, '');

/** Two intakes of one serial number at the same moment come one after the other. */
export async function lockSerial(db: Db, key: string): Promise<void> {
  await db.raw('select pg_advisory_xact_lock(hashtextextended(?, 0))', [`serial ${key}`]);
}

export async function unitsWithSerial(db: Db, key: string): Promise<number[]> {
  return z.array(z.number()).parse(await db('units').where({ serial_key: key }).orderBy('number').pluck('number'));
}

export async function insertUnit(db: Db, unit: Unit, stage: Stage): Promise<void> {
  const { plate } = unit;
  await db('units').insert({
    id: unit.id,
    number: unit.number,
    appliance: unit.appliance,
    maker: plate.maker,
    model: plate.model,
    serial: plate.serial,
    serial_key: plate.serial === undefined ? undefined : serialKey(plate.serial) || undefined,
    plate_unreadable: plate.plateUnreadable,
    protection_class: plate.protectionClass,
    volts: plate.volts,
    hertz: plate.hertz,
    watts: plate.watts,
    amperes: plate.amperes,
    mass_kg: plate.massKg,
    family: unit.family,
    complaint: unit.complaint,
    source: unit.source,
    cost_minor: unit.costMinor,
    licensed_only: unit.licensedOnly,
    taken_in_at: unit.takenInAt,
    taken_in_by: unit.takenInBy.id,
    taken_in_by_role: unit.takenInBy.role,
    same_serial_reason: unit.sameSerial?.reason,
    same_serial_units: unit.sameSerial?.units,
    stage,
  });
}

/** The other side of a link between units with one serial number. */
export async function linkSameSerial(db: Db, numbers: readonly number[], to: number, reason: string): Promise<void> {
  await db('units')
    .whereIn('number', [...numbers])
    .update({
      same_serial_reason: db.raw('coalesce(same_serial_reason, ?)', [reason]),
      same_serial_units: db.raw('array_append(same_serial_units, ?::integer)', [to]),
    });
}

export async function setFamily(db: Db, unitId: string, family: string): Promise<void> {
  await db('units').where({ id: unitId }).update({ family });
}

export async function setStage(db: Db, unitId: string, stage: Stage): Promise<void> {
  await db('units').where({ id: unitId }).update({ stage });
}

interface UnitFilter {
  find: string | undefined;
  stage: string | undefined;
  below: number | undefined;
  limit: number;
}

const likeAnywhere = (text: string): string => `%${text.replace(/[\\%_]/g, '\\$&')}%`;

/** Newest first. `find` looks at number, serial, maker, model, and at the codes that its captures showed. */
export async function listUnits(db: Db, { find, stage, below, limit }: UnitFilter): Promise<{ unit: Unit; stage: Stage }[]> {
  const query = unitRows(db).orderBy('number', 'desc').limit(limit);
  if (stage !== undefined) void query.where({ stage });
  if (below !== undefined) void query.where('number', '<', below);
  const words = find?.trim() ?? '';
  if (words !== '') {
    void query.where((any) => {
      void any.whereRaw(`units.maker || ' ' || units.model ilike ?`, [likeAnywhere(words)]);
      const key = serialKey(words);
      if (key !== '') void any.orWhereLike('serial_key', likeAnywhere(key));
      const digits = /^(?:no\.?\s*)?0*(\d{1,9})$/i.exec(words)?.[1];
      if (digits !== undefined) void any.orWhere({ number: Number(digits) });
      void any.orWhereExists(
        db('captures').whereRaw('captures.unit_id = units.id').whereRaw('captures.codes @> array[?]::text[]', [words.toUpperCase()]),
      );
    });
  }
  const rows: unknown[] = await query;
  return rows.map((row) => unitRowSchema.parse(row));
}
