import './units-table.css';
import { Link } from 'react-router-dom';
import type { UnitRow } from '../../../../shared/api/units.js';
import { stageSchema, type Stage } from '../../../../shared/readiness/stage.js';
import { SmallLampFace } from '../../../components/lamp-face.js';
import { SmallTag, type TagLook } from '../../../components/small-tag.js';
import { formatAge, formatMoney, plural, unitNumber } from '../../../lib/format.js';
import { paths } from '../../../paths.js';

/** Nearest to being ready first: that is where a hand is wanted next. */
export const STAGES_IN_ORDER: readonly Stage[] = ['proving', 'repair', 'testing', 'returned', 'intake', 'signed off', 'sold'];

export const isStage = (text: string | null): text is Stage => stageSchema.safeParse(text).success;

export function tagLook(row: Pick<UnitRow, 'stage' | 'tag'>): TagLook {
  if (row.stage === 'sold') return 'sold';
  if (row.tag?.standing === 'stands') return 'ready';
  return row.tag ? 'withdrawn' : 'open';
}

/** In words what the silhouette shows. */
function standingInWords(row: UnitRow): string {
  const look = tagLook(row);
  if (look === 'ready') return 'tag stands';
  if (look === 'withdrawn') return 'tag withdrawn';
  return `${row.rulesMet} of ${row.rulesTotal}`;
}

function OnTheLamps({ lamps }: { lamps: UnitRow['lamps'] }) {
  if (lamps.state === 'not captured') return <span className="text-ink2">not captured yet</span>;
  if (lamps.state === 'no code') return <span className="text-ink2">no code</span>;
  if (lamps.state === 'unreadable')
    return (
      <span className="flex items-center gap-2.5">
        unreadable <span className="hatched h-6 w-14" />
      </span>
    );
  return (
    <ul className="grid gap-1">
      {lamps.codes.map(({ code, face }, index) => (
        <li key={index} className="flex items-center gap-3">
          <b className="num text-[18px]!">{code}</b>
          {face && <SmallLampFace face={face} />}
        </li>
      ))}
    </ul>
  );
}

function Row({ row, currency, nowMs }: { row: UnitRow; currency: string; nowMs: number }) {
  return (
    <tr>
      <td className="units-number">
        <Link to={paths.unit(row.number)}>
          <span className="sr-only">Unit </span>
          {unitNumber(row.number)}
        </Link>
      </td>
      <td className="units-machine">
        {row.plate.maker} {row.plate.model} <span className="text-ink2">{row.appliance}</span>
      </td>
      <td className="units-tag">
        <span className="flex items-center gap-2 font-mono text-[15px] leading-tight">
          <SmallTag look={tagLook(row)} met={row.rulesMet} total={row.rulesTotal} />
          {standingInWords(row)}
        </span>
      </td>
      <td className="units-lamps">
        {row.licensedOnly ? (
          <b className="bg-ink px-2 py-1 font-mono text-[13px] whitespace-nowrap text-enamel">licensed person only</b>
        ) : (
          <OnTheLamps lamps={row.lamps} />
        )}
      </td>
      <td className="units-waits">{row.waitsFor}</td>
      <td className="units-since num">{formatAge(row.lastEventAt, nowMs)}</td>
      <td className="units-cost num">{formatMoney(row.costMinor, currency)}</td>
    </tr>
  );
}

/** The units by stage; on a phone each row folds into a few lines. */
export function UnitsTable({ rows, currency, nowMs }: { rows: readonly UnitRow[]; currency: string; nowMs: number }) {
  const groups = STAGES_IN_ORDER.map((stage) => ({ stage, rows: rows.filter((row) => row.stage === stage) })).filter(
    (group) => group.rows.length > 0,
  );
  return (
    <table className="units-table">
      <caption className="sr-only">Units, by stage</caption>
      <thead>
        <tr>
          {['stage', 'number', 'machine', 'rules met', 'code on the lamps', 'waits for', 'since'].map((head) => (
            <th key={head} scope="col">
              {head}
            </th>
          ))}
          <th scope="col" className="text-right!">
            cost
          </th>
        </tr>
      </thead>
      {groups.map((group) => (
        <tbody key={group.stage}>
          <tr className="units-stage-row">
            <th scope="rowgroup" rowSpan={group.rows.length + 1}>
              {group.stage}
              <small>{plural(group.rows.length, 'unit')}</small>
            </th>
          </tr>
          {group.rows.map((row) => (
            <Row key={row.id} row={row} currency={currency} nowMs={nowMs} />
          ))}
        </tbody>
      ))}
    </table>
  );
}
