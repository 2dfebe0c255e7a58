import { describe, expect, test } from 'vitest';
import { energisingGate } from '../../../shared/readiness/gates.js';
import {
  capture,
  deadTests,
  facts,
  goodReading,
  inspection,
  intake,
  override,
  reading,
  repair,
  returned,
  wil,
} from '../../helpers/unit-facts.js';

const realRig = { rigSimulated: false };
const asked = (...args: Parameters<typeof facts>) => energisingGate(facts(...args), realRig);

describe('Gate 1, dead tests before power', () => {
  test('When nothing was tested, then the gate is shut and names all three tests and the way through', () => {
    const gate = asked([intake()]);
    expect(gate.open).toBe(false);
    expect(gate.reasons).toEqual(['visual check is not done', 'protective conductor is not done', 'insulation is not done']);
    expect(gate.remedy).toContain('visual check, protective conductor, insulation in this order');
  });

  test('When the three passed in order, then the gate is open', () => {
    expect(asked([intake(), ...deadTests()])).toEqual({ open: true, reasons: [] });
  });

  test('When insulation was measured before the protective conductor, then it has to be done again', () => {
    const [visual, conductor, insulation] = deadTests() as [
      ReturnType<typeof intake>,
      ReturnType<typeof intake>,
      ReturnType<typeof intake>,
    ];
    const events = [intake(), visual, insulation, conductor];
    expect(asked(events).reasons).toEqual(['insulation was done out of order: do it again now']);
    expect(asked([...events, goodReading('insulation')]).open).toBe(true);
  });

  test('When one of them fails, then everything after it stops, and a pass right after it does not help', () => {
    const events = [intake(), inspection(), reading('protective-conductor', 0.9)];
    expect(energisingGate(facts(events), { ...realRig, before: 'insulation' }).reasons).toEqual(['protective conductor: fail']);
    const again = asked([...events, goodReading('protective-conductor'), goodReading('insulation')]);
    expect(again.open).toBe(false);
    expect(again.remedy).toContain('record the repair');
  });

  test('When a reading is inconclusive, then it is not a pass', () => {
    expect(asked([intake(), inspection(), reading('protective-conductor', 0.3), goodReading('insulation')]).reasons).toEqual([
      'protective conductor: inconclusive',
    ]);
  });

  test('When the machine was mended, then the dead tests are due again', () => {
    expect(asked([intake(), ...deadTests(), repair()]).open).toBe(false);
    expect(asked([intake(), ...deadTests(), repair(), ...deadTests()]).open).toBe(true);
  });

  test('When the machine came back, then tests from before the return no longer count', () => {
    expect(asked([intake(), ...deadTests(), returned()]).open).toBe(false);
  });

  test('When a lead overrides with a reason, then the gate opens, says so, and shuts again with the next repair', () => {
    const gate = asked([intake(), inspection(), override()]);
    expect(gate.open).toBe(true);
    expect(gate.override).toEqual({ by: 'Maren Holt', reason: 'insulation tester is away, cord was replaced' });
    expect(gate.reasons.length).toBeGreaterThan(0);
    expect(asked([intake(), override(), repair()]).open).toBe(false);
  });

  test('When a dead test fails after the override, then the reason given before does not cover it', () => {
    const gate = asked([intake(), override(), reading('insulation', 0.01)]);
    expect(gate.open).toBe(false);
    expect(asked([intake(), override(), reading('insulation', 0.01), override()]).open).toBe(true);
  });

  test('When a technician writes an override into the list, then it opens nothing', () => {
    expect(asked([intake(), override(wil)]).open).toBe(false);
  });

  test('When the machine is class II, then no protective conductor is asked for', () => {
    expect(asked([intake(), inspection(), goodReading('insulation')], { protectionClass: 'II' }).open).toBe(true);
  });

  test('When the dead tests came off a simulated rig, then they do not open the gate of a real rig, not even in the demo shop', () => {
    const events = [intake(), ...deadTests({ simulated: true })];
    expect(asked(events).open).toBe(false);
    expect(asked(events, { demo: true }).open).toBe(false);
    expect(energisingGate(facts(events, { demo: true }), { rigSimulated: true }).open).toBe(true);
    expect(energisingGate(facts(events, { demo: false }), { rigSimulated: true }).open).toBe(false);
  });

  test('When a capture was somehow recorded already, then it proves nothing about the dead tests', () => {
    expect(asked([intake(), capture()]).open).toBe(false);
  });

  test('When each dead test asks for itself, then only those before it must have passed', () => {
    expect(energisingGate(facts([intake()]), { ...realRig, before: 'visual' }).open).toBe(true);
    expect(energisingGate(facts([intake()]), { ...realRig, before: 'protective-conductor' }).reasons).toEqual(['visual check is not done']);
    expect(energisingGate(facts([intake(), inspection('fail')]), { ...realRig, before: 'protective-conductor' }).open).toBe(false);
  });
});

test('Gate 11: when the machine is for a licensed person only, then not even an override energises it', () => {
  const gate = asked([intake(), ...deadTests(), override()], { licensedOnly: true });
  expect(gate.open).toBe(false);
  expect(gate.reasons[0]).toContain('licensed person only');
});
