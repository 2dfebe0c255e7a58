// A bench whose server is away: who is signed in, unit 0412 and its sheet are what it kept from last time.
import { writeWhole } from '../../cli/home.js';
import type { UnitEvent } from '../../shared/history/events.js';
import { benchTerminal, signedIn, type BenchTerminal, type BenchTerminalOptions } from './bench-terminal.js';
import { heron, intake, wil } from './unit-facts.js';
import { unitOnTheBench } from './unit-on-bench.js';

/** Wil Tarrow's bench, with a Brindle BW 714, No. 0412, to which these things happened. */
export function offlineBench(events: UnitEvent[] = [intake()], options: BenchTerminalOptions = {}): BenchTerminal {
  const bench = benchTerminal(options);
  const { home } = bench.context;
  const { page, me } = unitOnTheBench(events);
  const user = { ...wil, email: 'wil@millrace.example' };
  signedIn(bench, { ...user, token: 'a token for the test' });
  writeWhole(home.path('cache', 'me.json'), JSON.stringify({ user, shop: me.shop }));
  writeWhole(home.path('cache', 'units', '0412.json'), JSON.stringify(page));
  writeWhole(
    home.path('cache', 'sheets', 'heron-h6.json'),
    JSON.stringify({ sheet: heron, text: '', editions: [heron.edition], at: '2026-03-01T09:00:00Z' }),
  );
  return bench;
}
