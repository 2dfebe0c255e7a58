import type { Check, Sheet } from './schema.js';

/** One thing that a sheet says wrongly, or that a shop should know about it. */
export interface SheetFinding {
  severity: 'error' | 'warning';
  /** Keys and indexes from the top of the sheet. */
  path: (string | number)[];
  reason: string;
}

/** More weighted lamps than this make more patterns than any panel shows. */
const MOST_WEIGHTED_LAMPS = 12;

/**
 * Finds where a sheet contradicts itself: ids that no lamp has, ids, weights or codes twice, a measured check without limits, patterns
 * that look the same on the lamps; and, as warnings, what makes decoding harder (a ready blink that the times don't tell from a code).
 *
 * @returns errors and warnings in the sheet's order; an empty list for a sheet in order
 *
 * @example checkSheet(sheetWithWeightTwice)[0].reason // "weight 2 stands twice: 'wash' and 'rinse'"
 */
export function checkSheet(sheet: Sheet): SheetFinding[] {
  return [...checkLamps(sheet), ...checkReady(sheet), ...checkCoding(sheet), ...checkRest(sheet)];
}

const error = (path: (string | number)[], reason: string): SheetFinding => ({ severity: 'error', path, reason });
const warning = (path: (string | number)[], reason: string): SheetFinding => ({ severity: 'warning', path, reason });

/** One finding for each value that stands more than once. */
function repeated(
  values: readonly (string | number)[],
  at: (index: number) => (string | number)[],
  say: (value: string | number) => string,
): SheetFinding[] {
  return values.flatMap((value, index) => (values.indexOf(value) < index ? [error(at(index), say(value))] : []));
}

function unknownLamp(sheet: Sheet, id: string, path: (string | number)[]): SheetFinding[] {
  return sheet.lamps.some((lamp) => lamp.id === id) ? [] : [error(path, `lamp '${id}' is not among the sheet's lamps`)];
}

function checkLamps(sheet: Sheet): SheetFinding[] {
  const ids = sheet.lamps.map((lamp) => lamp.id);
  return repeated(
    ids,
    (index) => ['lamps', index, 'id'],
    (id) => `lamp '${id}' stands twice`,
  );
}

function checkReady(sheet: Sheet): SheetFinding[] {
  const ready = sheet.ready;
  if (ready === undefined) return [];
  const findings = [
    ...ready.lamps.flatMap((id, index) => unknownLamp(sheet, id, ['ready', 'lamps', index])),
    ...repeated(
      ready.lamps,
      (index) => ['ready', 'lamps', index],
      (id) => `lamp '${id}' stands twice`,
    ),
  ];
  if (sheet.coding.kind === 'weighted-phases' && 2 * sheet.coding.phaseS[0] <= ready.periodS[1]) {
    const reason = `a ready blink may last as long as two phases (${ready.periodS[1]} s and ${2 * sheet.coding.phaseS[0]} s): with a burnt-out lamp the two can't be told apart by their times`;
    findings.push(warning(['ready', 'periodS'], reason));
  }
  return findings;
}

function checkCoding(sheet: Sheet): SheetFinding[] {
  const coding = sheet.coding;
  if (coding.kind === 'weighted-phases') {
    const entries = Object.entries(coding.weights);
    const findings = [
      ...unknownLamp(sheet, coding.selector, ['coding', 'selector']),
      ...entries.flatMap(([id]) => unknownLamp(sheet, id, ['coding', 'weights', id])),
    ];
    if (coding.selector in coding.weights)
      findings.push(error(['coding', 'weights', coding.selector], `the selector '${coding.selector}' can't have a weight too`));
    if (entries.length === 0) findings.push(error(['coding', 'weights'], 'no lamp has a weight'));
    if (entries.length > MOST_WEIGHTED_LAMPS)
      findings.push(error(['coding', 'weights'], `${entries.length} weighted lamps are more than ${MOST_WEIGHTED_LAMPS}`));
    entries.forEach(([id, weight], index) => {
      const before = entries.findIndex(([, other]) => other === weight);
      if (before < index)
        findings.push(error(['coding', 'weights', id], `weight ${weight} stands twice: '${entries[before]?.[0]}' and '${id}'`));
    });
    if (!coding.code.includes('{on}') || !coding.code.includes('{off}')) {
      findings.push(error(['coding', 'code'], 'the code must hold {on} and {off}, or two codes look the same'));
    }
    return findings;
  }
  if (coding.kind === 'flash-count') {
    const findings = unknownLamp(sheet, coding.lamp, ['coding', 'lamp']);
    for (let digit = 1; digit <= coding.digits; digit += 1) {
      if (!coding.code.includes(`{${digit}}`))
        findings.push(error(['coding', 'code'], `the code must hold {${digit}}, or two codes look the same`));
    }
    const bands = [
      ['gapS', 'pauseS'],
      ['pauseS', 'restS'],
    ] as const;
    for (const [shorter, longer] of bands) {
      if (coding[shorter][1] >= coding[longer][0]) {
        findings.push(
          error(
            ['coding', longer],
            `${shorter} reaches ${coding[shorter][1]} s and ${longer} begins at ${coding[longer][0]} s: the two can't be told apart`,
          ),
        );
      }
    }
    return findings;
  }
  const named = [...new Set(coding.patterns.flatMap((pattern) => Object.keys(pattern.lamps)))];
  const looks = coding.patterns.map((pattern) => named.map((id) => pattern.lamps[id] ?? 'off').join(' '));
  const findings = [
    ...coding.patterns.flatMap((pattern, index) =>
      Object.keys(pattern.lamps).flatMap((id) => unknownLamp(sheet, id, ['coding', 'patterns', index, 'lamps', id])),
    ),
    ...repeated(
      coding.patterns.map((pattern) => pattern.code),
      (index) => ['coding', 'patterns', index, 'code'],
      (code) => `code '${code}' stands twice`,
    ),
    ...repeated(
      looks,
      (index) => ['coding', 'patterns', index],
      () => 'this pattern looks the same on the lamps as one above',
    ),
  ];
  if (coding.rateHz.slow[1] >= coding.rateHz.fast[0])
    findings.push(error(['coding', 'rateHz'], "slow and fast overlap: they can't be told apart"));
  if (coding.holdS < 2 / coding.rateHz.slow[0])
    findings.push(error(['coding', 'holdS'], `holdS is shorter than two periods of the slowest rate (${2 / coding.rateHz.slow[0]} s)`));
  return findings;
}

const classesMeet = (one: Check, other: Check): boolean =>
  !one.classes || !other.classes || one.classes.some((name) => other.classes?.includes(name));

function checkRest(sheet: Sheet): SheetFinding[] {
  const findings = [
    ...repeated(
      sheet.faults.map((fault) => fault.code),
      (index) => ['faults', index, 'code'],
      (code) => `code '${code}' has two faults`,
    ),
    ...repeated(
      sheet.procedures.map((procedure) => procedure.id),
      (index) => ['procedures', index, 'id'],
      (id) => `procedure '${id}' stands twice`,
    ),
    ...repeated(
      sheet.checks.map((check) => check.id),
      (index) => ['checks', index, 'id'],
      (id) => `check '${id}' stands twice`,
    ),
  ];
  if (sheet.calibration !== undefined) {
    findings.push(...unknownLamp(sheet, sheet.calibration.lockLamp, ['calibration', 'lockLamp']));
    const procedure = sheet.calibration.procedure;
    if (!sheet.procedures.some(({ id }) => id === procedure))
      findings.push(error(['calibration', 'procedure'], `procedure '${procedure}' is not among the sheet's procedures`));
  }
  sheet.checks.forEach((check, index) => {
    const rival = sheet.checks
      .slice(0, index)
      .find((one) => one.deadTest !== undefined && one.deadTest === check.deadTest && classesMeet(one, check));
    if (rival)
      findings.push(
        error(['checks', index, 'deadTest'], `'${check.id}' and '${rival.id}' are both the ${check.deadTest} test: the gate needs one`),
      );
    if (check.kind !== 'measure') return;
    if (check.deadTest !== undefined && check.condition === 'energised')
      findings.push(error(['checks', index, 'condition'], `'${check.id}' is a dead test: its condition is dead`));
    if (check.low === undefined && check.high === undefined)
      findings.push(error(['checks', index], `check '${check.id}' is measured and has no limits: give low, high or both`));
    if (check.low !== undefined && check.high !== undefined && check.low > check.high)
      findings.push(error(['checks', index], `check '${check.id}': low ${check.low} is above high ${check.high}`));
  });
  return findings;
}
