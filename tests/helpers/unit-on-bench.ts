import { unitPageSchema, type UnitPage } from '../../shared/api/units.js';
import type { UnitEvent } from '../../shared/history/events.js';
import { energisingGate } from '../../shared/readiness/gates.js';
import { readiness } from '../../shared/readiness/readiness.js';
import { stageOf } from '../../shared/readiness/stage.js';
import type { UnitOnBench } from '../../cli/bench/unit-on-bench.js';
import { heron, intake, wil } from './unit-facts.js';

/** A Brindle BW 714, No. 0412, as a bench knows it: with these events, in the demo shop. */
export function unitOnTheBench(events: UnitEvent[] = [intake()], { licensedOnly = false }: { licensedOnly?: boolean } = {}): UnitOnBench {
  const facts = {
    unit: { number: 412, protectionClass: 'I' as const, licensedOnly },
    sheet: heron,
    events,
    shop: { demo: true, fourEyes: true },
  };
  const page: UnitPage = unitPageSchema.parse({
    unit: {
      id: '019af7a0-0000-7000-8000-000000000412',
      number: 412,
      appliance: 'washing machine',
      plate: {
        maker: 'Brindle',
        model: 'BW 714',
        serial: '7143 0968 2251',
        plateUnreadable: false,
        protectionClass: 'I',
        volts: 230,
        massKg: 68,
      },
      family: 'heron-h6',
      complaint: 'stands full of water',
      costMinor: 1250,
      licensedOnly,
      takenInAt: '2026-03-03T09:00:00Z',
      takenInBy: wil,
    },
    stage: stageOf(events),
    readiness: readiness(facts),
    energising: energisingGate(facts, { rigSimulated: true }),
    runs: [],
    events,
    faces: {},
  });
  return {
    page,
    sheet: heron,
    me: {
      user: { ...wil, email: 'wil@millrace.example' },
      shop: {
        name: 'Millrace Mend',
        address: '12 Dyehouse Yard',
        phone: '01632 960412',
        currency: 'GBP',
        demo: true,
        fourEyes: true,
        warrantyMonths: 12,
      },
    },
    by: wil,
    offline: false,
    facts,
  };
}
