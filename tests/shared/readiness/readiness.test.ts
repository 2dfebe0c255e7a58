import { describe, expect, test } from 'vitest';
import type { PersonRef, UnitEvent } from '../../../shared/history/events.js';
import { countingEvents } from '../../../shared/readiness/facts.js';
import { judgeNoCode, noCodeProof } from '../../../shared/readiness/no-code.js';
import { readiness } from '../../../shared/readiness/readiness.js';
import { whatWithdraws } from '../../../shared/readiness/tag-standing.js';
import { mendedOnTag, testedOnTag } from '../../../shared/readiness/tag-content.js';
import {
  answer,
  calibration,
  capture,
  cleared,
  deadTests,
  facts,
  goodReading,
  heron,
  intake,
  inspection,
  maren,
  mendedAndProved,
  partRemoved,
  reading,
  repair,
  showsCode,
  signOff,
  unreadable,
  wil,
  withdrawn,
} from '../../helpers/unit-facts.js';

const rule = (events: readonly UnitEvent[], id: string, signer?: PersonRef, over = {}) =>
  readiness(facts(events, over), signer).rules.find((one) => one.id === id);

describe('Readiness', () => {
  test('When a unit was just taken in, then no rule is met and each says how to get it', () => {
    const judged = readiness(facts([intake()]));
    expect(judged).toMatchObject({ met: 0, total: 5, readyToSign: false });
    expect(judged.rules.every((one) => one.how !== undefined && one.how.length > 10)).toBe(true);
  });

  test('When it was mended and proved, then only the four eyes are missing, and a lead who did not touch it can sign', () => {
    const judged = readiness(facts(mendedAndProved()));
    expect(judged.rules.filter((one) => one.state !== 'met').map((one) => one.id)).toEqual(['four-eyes']);
    expect(judged.readyToSign).toBe(true);
    expect(readiness(facts(mendedAndProved()), maren).met).toBe(5);
  });

  test('When a required check is inconclusive, then its rule is inconclusive and not met (gate 3)', () => {
    const events = mendedAndProved();
    expect(rule([...events, reading('heater', 29)], 'checks')).toMatchObject({ state: 'inconclusive', evidence: 'Heater: inconclusive' });
  });

  test('When a part is changed after the proof, then checks, safety, no code and calibration are all due again', () => {
    const judged = readiness(facts([...mendedAndProved(), repair('Heater')]));
    expect(judged.rules.filter((one) => one.state === 'met')).toEqual([]);
  });

  test('When a part is taken out for another unit, then everything is due again, as after a repair', () => {
    const judged = readiness(facts([...mendedAndProved(), partRemoved()]));
    expect(judged.rules.filter((one) => one.state === 'met')).toEqual([]);
  });

  test('When an inspection was put down as not done, then doing it makes it good', () => {
    expect(rule([...mendedAndProved(), inspection('not done'), inspection('pass')], 'electrical-safety')?.state).toBe('met');
  });

  test('When work was done without a part, then the calibration run stands, for only a swap makes it due', () => {
    const events = [...mendedAndProved(), repair('Hose clip tightened', { swapped: false })];
    expect(rule(events, 'calibration')?.state).toBe('met');
    expect(rule(events, 'checks')?.state).toBe('missing');
  });

  test('When the machine was only moved here, then a calibration run is due as well (common practice, no published source)', () => {
    expect(rule([intake(), ...deadTests()], 'calibration')).toMatchObject({
      state: 'missing',
      evidence: 'none since the machine was moved here',
    });
  });

  test('When a calibration run failed, then the rule fails, and the next run that ends well meets it', () => {
    expect(rule([intake(), calibration('fail')], 'calibration')?.state).toBe('fail');
    expect(rule([intake(), calibration('fail'), calibration('pass')], 'calibration')?.state).toBe('met');
  });

  test('When the unit has no service sheet, then nothing can be ready', () => {
    expect(readiness(facts(mendedAndProved(), { sheet: undefined }), maren).readyToSign).toBe(false);
  });
});

describe('Gate 4, "no code" must be proved', () => {
  test.each([
    ['a ready blink only, long enough', answer(), 'pass'],
    ['a code', showsCode('G5K3'), 'fail'],
    ['an unreadable stretch', unreadable(), 'inconclusive'],
    ['no ready blink', answer({ segments: [{ kind: 'dark', fromS: 0, toS: 25 }] }), 'inconclusive'],
    ['a dead lamp', answer({ deadLamps: ['drain'] }), 'inconclusive'],
    ['less than the sheet asks for', answer({ durationS: 19.9 }), 'inconclusive'],
    ['nothing at all', answer({ segments: [], samples: 0, durationS: 0 }), 'inconclusive'],
  ])('When a capture holds %s, then its verdict is what the gate says', (_, given, verdict) => {
    expect(judgeNoCode(given, heron).verdict).toBe(verdict);
  });

  test('When the stored codes were not cleared after the repair, then no capture proves anything', () => {
    expect(noCodeProof(facts([intake(), capture(showsCode('G5K3')), repair(), capture()]))).toMatchObject({
      verdict: 'not done',
      reason: 'stored codes were not cleared after the repair',
    });
  });

  test('When a code was read after the repair and before the clearing, then it was a stored one and the proof begins after it', () => {
    expect(noCodeProof(facts([intake(), repair(), capture(showsCode('G5K3')), cleared(), capture()])).verdict).toBe('pass');
  });

  test('When a code comes after the clearing, then clearing again and capturing again does not get round it', () => {
    expect(noCodeProof(facts([intake(), repair(), cleared(), capture(showsCode('G5K3')), cleared(), capture()])).verdict).toBe('fail');
    expect(noCodeProof(facts([intake(), repair(), cleared(), capture(), capture(showsCode('G5K3')), capture()])).verdict).toBe('fail');
  });

  test('When nothing was mended and a code was read, then clearing it is no mend', () => {
    expect(noCodeProof(facts([intake(), capture(showsCode('G5K3')), cleared(), capture()])).verdict).toBe('fail');
  });

  test('When a capture is unreadable, then a shorter proof does not replace it, one at least as long does', () => {
    const events = [intake(), repair(), cleared(), capture(unreadable(60)), capture(answer({ durationS: 25 }))];
    expect(noCodeProof(facts(events)).verdict).toBe('inconclusive');
    expect(noCodeProof(facts([...events, capture(answer({ durationS: 60 }))])).verdict).toBe('pass');
  });

  test('When a long unreadable capture stands among short ones, then it is the one that a proof has to match', () => {
    const short = (): UnitEvent => capture(answer({ durationS: 5 }));
    const events = [intake(), repair(), cleared(), short(), capture(unreadable(60)), short(), capture(answer({ durationS: 25 }))];
    expect(noCodeProof(facts(events)).verdict).toBe('inconclusive');
  });

  test('When a later capture is unreadable, then the earlier proof no longer stands', () => {
    expect(noCodeProof(facts([intake(), repair(), cleared(), capture(), capture(unreadable())])).verdict).toBe('inconclusive');
  });
});

describe('Gate 5, no retesting until it passes', () => {
  test('When a check failed and the same meter then passes it without a repair, then the fail stands', () => {
    expect(rule([intake(), ...deadTests(), reading('heater', 40), goodReading('heater')], 'checks')?.state).toBe('fail');
  });
  test('When the reading of smaller uncertainty was typed in, then it takes no worse one back', () => {
    const events = [...mendedAndProved(), reading('protective-conductor-current', 3.44, { accuracy: '2%+5' })];
    expect(
      rule([...events, reading('protective-conductor-current', 3.41, { accuracy: '0.1%+1', source: 'typed' })], 'electrical-safety')?.state,
    ).toBe('inconclusive');
  });
  test('When an inconclusive reading is followed by one of smaller uncertainty, then that one counts', () => {
    const inconclusive = [...mendedAndProved(), reading('protective-conductor-current', 3.44, { accuracy: '2%+5' })];
    expect(rule(inconclusive, 'electrical-safety')?.state).toBe('inconclusive');
    expect(rule([...inconclusive, reading('protective-conductor-current', 3.43, { accuracy: '2%+5' })], 'electrical-safety')?.state).toBe(
      'inconclusive',
    );
    expect(rule([...inconclusive, reading('protective-conductor-current', 3.41, { accuracy: '0.5%+2' })], 'electrical-safety')?.state).toBe(
      'met',
    );
  });
});

describe('Gate 6, simulated results never count outside the demo shop', () => {
  test('When everything is simulated, then a real shop counts none of it and the demo shop all', () => {
    const events = mendedAndProved({ simulated: true });
    expect(
      readiness(facts(events, { demo: false }), maren)
        .rules.filter((one) => one.state === 'met')
        .map((one) => one.id),
    ).toEqual(['four-eyes']);
    expect(readiness(facts(events, { demo: true }), maren).met).toBe(5);
  });

  test('When a capture comes from a file, then it counts only if it names this unit and is newer than the last repair', () => {
    const mended = repair();
    const beforeTheRepair = new Date(Date.parse(mended.at) - 1000).toISOString();
    const afterTheRepair = new Date(Date.parse(mended.at) + 1000).toISOString();
    const counted = (over: object): number => countingEvents(facts([mended, capture(answer(), { fromFile: true, ...over })])).length;
    expect(counted({ headerUnit: '0412', capturedAt: afterTheRepair })).toBe(2);
    expect(counted({ headerUnit: '0413', capturedAt: afterTheRepair })).toBe(1);
    expect(counted({ capturedAt: afterTheRepair })).toBe(1);
    expect(counted({ headerUnit: '0412', capturedAt: beforeTheRepair })).toBe(1);
  });
});

describe('Gate 6, captures with a header of another place or time', () => {
  test('When a capture or a calibration run names another unit, then it does not count, file or not', () => {
    const other = { headerUnit: '9999' };
    expect(countingEvents(facts([intake(), capture(answer(), other), calibration('pass', other)])).map((event) => event.kind)).toEqual([
      'intake',
    ]);
    expect(
      countingEvents(facts([intake(), capture(answer(), { headerUnit: '0412' }), calibration('pass', { headerUnit: '412' })])),
    ).toHaveLength(3);
  });

  test('When a capture is older than the last repair, then it does not count, and a backdated repair does not make it newer', () => {
    const before = capture(showsCode('G5K3'));
    const between = { capturedAt: new Date(Date.parse(before.at) - 30_000).toISOString() };
    const backdated = { ...repair(), at: '2026-03-01T09:00:00Z' };
    expect(
      countingEvents(facts([intake(), before, backdated, cleared(), capture(answer(), between), calibration('pass', between)])).map(
        (event) => event.kind,
      ),
    ).toEqual(['intake', 'capture', 'repair', 'codes cleared']);
  });
});

describe('A sheet that changed', () => {
  test('When a limit was made tighter after the reading, then the reading is judged by the new one', () => {
    const tighter = {
      ...heron,
      checks: heron.checks.map((check) => (check.id === 'heater' && check.kind === 'measure' ? { ...check, low: 27.5 } : check)),
    };
    expect(rule(mendedAndProved(), 'checks', undefined, { sheet: tighter })).toMatchObject({ state: 'fail', evidence: 'Heater: fail' });
  });
  test('When the check is now in another unit of measurement, then the old reading says nothing', () => {
    const other = {
      ...heron,
      checks: heron.checks.map((check) =>
        check.id === 'heater' && check.kind === 'measure' ? { ...check, unit: 'Mohm' as const } : check,
      ),
    };
    expect(rule(mendedAndProved(), 'checks', undefined, { sheet: other })).toMatchObject({ state: 'missing' });
  });
});

describe('Gate 7, four eyes', () => {
  test('When the lead recorded a single reading, then that lead may not sign', () => {
    const events = [...mendedAndProved(), goodReading('heater', { by: maren })];
    expect(rule(events, 'four-eyes', maren)).toMatchObject({ state: 'fail', evidence: 'Maren Holt worked on it' });
  });
  test('When the lead worked on it before the last return only, then those hands are forgotten', () => {
    const before = [intake(), goodReading('heater', { by: maren })];
    expect(rule([...before, ...mendedAndProved()], 'four-eyes', maren)?.state).toBe('met');
  });
  test('When somebody who is no lead would sign, then the rule fails', () => {
    expect(rule(mendedAndProved(), 'four-eyes', { id: 'joss', name: 'Joss Penn', role: 'admin' })?.state).toBe('fail');
    expect(rule(mendedAndProved(), 'four-eyes', wil)?.state).toBe('fail');
  });
  test('When the shop switched it off, then the rule is met and its evidence says so', () => {
    const alone: PersonRef = { ...wil, role: 'lead' };
    expect(rule(mendedAndProved(), 'four-eyes', alone, { fourEyes: false })).toMatchObject({
      state: 'met',
      evidence: 'switched off in this shop; the tag says so',
    });
  });
});

describe('Gate 8, what withdraws a tag', () => {
  const signed = (): UnitEvent[] => [...mendedAndProved(), signOff()];
  test.each([
    ['nothing', () => [], undefined],
    ['a later reading that passes', () => [goodReading('heater')], undefined],
    ['a later check that fails', () => [reading('heater', 40)], 'a later check did not pass: Heater, fail'],
    ['a later check that is inconclusive', () => [reading('heater', 29)], 'a later check did not pass: Heater, inconclusive'],
    ['a failed visual check', () => [inspection('fail')], 'a later check did not pass: Visual check, fail'],
    ['a part taken out', () => [partRemoved()], 'a part was taken out: Drain pump'],
    ['a repair', () => [repair('Lid lock')], 'the machine was mended again after the sign-off: Lid lock'],
    ['a code on the lamps', () => [capture(showsCode('G2K9'))], 'the lamps showed G2K9 afterwards'],
    [
      'a calibration run that does not end',
      () => [calibration('fail')],
      'a later calibration run did not pass: 2:30, the sheet allows 2:00 to 3:00',
    ],
  ])('When %s follows the sign-off, then the tag is judged by it', (_, later, reason) => {
    expect(whatWithdraws(facts([...signed(), ...later()]), '0412-1')).toBe(reason);
  });
  test('When a simulated reading fails in a real shop, then it withdraws nothing', () => {
    expect(whatWithdraws(facts([...signed(), reading('heater', 40, { simulated: true })]), '0412-1')).toBeUndefined();
  });
  test('When the tag was withdrawn, then the four eyes are missing again', () => {
    expect(rule([...signed(), withdrawn()], 'four-eyes')?.state).toBe('missing');
    expect(rule(signed(), 'four-eyes')?.state).toBe('met');
  });
});

test('When the tag is written, then it holds each passed check once, the calibration run and the lamps, and only what was mended since the unit was opened', () => {
  const all = facts(mendedAndProved());
  expect(testedOnTag(all).map((row) => row.title)).toEqual([
    'Visual check',
    'Protective conductor',
    'Insulation',
    'Drain pump winding',
    'Heater',
    'Inlet valve coil',
    'Protective conductor current, running',
    'Calibration run',
    'Lamps: no code',
  ]);
  expect(testedOnTag(all).find((row) => row.title === 'Calibration run')).toMatchObject({ reading: '2:30', limit: '2:00 to 3:00' });
  expect(testedOnTag(all).at(-1)?.lamps).toEqual([true, true, true, true, true, false]);
  expect(mendedOnTag(all).map((row) => row.part)).toEqual(['Drain pump']);
});
