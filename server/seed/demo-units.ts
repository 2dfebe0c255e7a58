import type { z } from 'zod';
import type { newUnitSchema } from '../../shared/api/units.js';

type NewUnit = z.output<typeof newUnitSchema>;

/** What stands at the gate of the demo shop. */
export const DEMO_UNITS: readonly NewUnit[] = [
  {
    appliance: 'washing machine',
    plate: {
      maker: 'Brindle',
      model: 'BW 714',
      serial: '7143 0968 2251',
      plateUnreadable: false,
      protectionClass: 'I',
      volts: 230,
      hertz: 50,
      watts: 2050,
      massKg: 68,
    },
    family: 'heron-h6',
    complaint: 'Stands full of water, lamps blink',
    source: 'house clearance',
    costMinor: 2000,
  },
  {
    appliance: 'washing machine',
    plate: {
      maker: 'Brindle',
      model: 'BW 508',
      serial: '5083 1120 0417',
      plateUnreadable: false,
      protectionClass: 'I',
      volts: 230,
      hertz: 50,
      watts: 1900,
      massKg: 61,
    },
    family: 'heron-h6',
    complaint: 'Water stays cold',
    source: 'brought in by its owner',
    costMinor: 1500,
  },
  {
    appliance: 'fridge',
    plate: {
      maker: 'Oakhithe',
      model: 'OF 120',
      serial: '1203 0042',
      plateUnreadable: false,
      protectionClass: 'I',
      volts: 230,
      hertz: 50,
      watts: 90,
      massKg: 38,
    },
    complaint: 'Runs all day and stays warm',
    source: 'house clearance',
    costMinor: 500,
  },
];
