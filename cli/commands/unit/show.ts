import type { UnitPage } from '../../../shared/api/units.js';
import { unitPage } from '../../bench/unit-on-bench.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { leftOfUnit, type Left } from '../../journal/left-here.js';
import { moneyText } from '../../money.js';
import type { Style } from '../../output.js';
import { eventLine } from '../../render/event-line.js';
import { printJson } from '../../render/json.js';
import { blankTagLines } from '../../render/tag-box.js';
import { dayText, timeText, unitLabel } from '../../render/words.js';
import { shopHere } from '../../session.js';

/** Everything about a unit, newest first. */
export async function runUnitShow({ number, json }: { number: number; json?: boolean }, context: Context): Promise<number> {
  const { value: page, offline } = await unitPage(context, number);
  if (offline) context.stderr.say('The server can’t be reached: this is from last time.');
  const left = leftOfUnit(context, number);
  if (json === true) {
    printJson(context, left.length > 0 ? { ...page, onThisBench: left } : page);
    return EXIT.good;
  }
  const shop = await shopHere(context);
  context.stdout.write(`${unitLines(page, shop.currency, await context.stdout.style()).join('\n')}\n`);
  if (left.length > 0) context.stdout.write(`\n${leftLines(left).join('\n')}\n`);
  return EXIT.good;
}

function unitLines(page: UnitPage, currency: string, style: Style): string[] {
  const { unit, stage, energising, tag, events } = page;
  const { ink } = style;
  const { plate } = unit;
  const rated = [
    `class ${plate.protectionClass}`,
    plate.volts === undefined ? '' : `${plate.volts} V`,
    plate.hertz === undefined ? '' : `${plate.hertz} Hz`,
    plate.watts === undefined ? '' : `${plate.watts} W`,
    plate.amperes === undefined ? '' : `${plate.amperes} A`,
    plate.massKg === undefined ? '' : `${plate.massKg} kg`,
  ].filter(Boolean);
  return [
    `${ink.bold(unitLabel(unit.number))}  ${ink.bold(`${plate.maker} ${plate.model}`)}, ${unit.appliance}, ${plate.serial === undefined ? 'serial unreadable' : `serial ${plate.serial}`}`,
    `${rated.join(', ')}   ${unit.family ?? 'no control family'}   ${stage}`,
    `Taken in ${dayText(unit.takenInAt)} by ${unit.takenInBy.name}${unit.source === undefined ? '' : `, from ${unit.source}`}, ${moneyText(unit.costMinor, currency)}`,
    `“${unit.complaint}”`,
    ...(unit.sameSerial ? [`The same serial as ${unit.sameSerial.units.map(unitLabel).join(', ')}: ${unit.sameSerial.reason}`] : []),
    ...(unit.licensedOnly ? [ink.bold('Licensed person only. No script runs on it.')] : []),
    ...(tag ? [`Tag ${tag.number} ${tag.standing}, signed off ${dayText(tag.signedOffAt)}`] : []),
    ...gateLines(energising, ink),
    '',
    ...blankTagLines(page, style),
    '',
    ...[...events].reverse().flatMap((event) => eventLine(event, style)),
  ];
}

/** What the server does not know of it. */
const leftLines = (left: readonly Left[]): string[] => [
  'Only on this bench:',
  ...left.flatMap(({ state, what, madeAt, why }) => [
    `  ${state}: ${what}, ${dayText(madeAt)} ${timeText(madeAt)}`,
    ...why.split('\n').map((line) => `    ${line}`),
  ]),
];

function gateLines({ open, reasons, remedy, override }: UnitPage['energising'], ink: Style['ink']): string[] {
  if (override) return [`Power: a lead, ${override.by}, opened the gate: ${override.reason}`];
  if (open) return ['Power: the dead tests have passed.'];
  return [`${ink.bold('No power yet')}: ${reasons.join('; ')}.`, ...(remedy === undefined ? [] : [`To open it: ${remedy}.`])];
}
