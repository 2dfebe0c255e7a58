import { tagPageSchema, type TagPage } from '../../shared/api/tags.js';

type Content = TagPage['content'];
const row = (title: string, reading: string, limit: string, more: Partial<Content['tested'][number]> = {}): Content['tested'][number] => ({
  title,
  reading,
  limit,
  verdict: 'pass',
  ...more,
});

/** The tag of an invented machine, with an address as long as a real one's. */
export function tagPage(change: Partial<Content> = {}, page: Partial<TagPage> = {}): TagPage {
  return tagPageSchema.parse({
    content: {
      tag: '0412-2',
      lookUpWord: '7QKF',
      sample: false,
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
      tested: [
        row('Protective conductor', '0.084 Ω', 'at most 0.300 Ω', { spread: '±0.007' }),
        row('Insulation', '2.31 MΩ', 'at least 1.00 MΩ', { spread: '±0.14' }),
        row('Protective conductor current, running', '0.62 mA', 'at most 3.50 mA', { spread: '±0.07' }),
        row('Lamps: no code', '20 s', 'ready blink', { lamps: [true, true, true, true, true, false] }),
      ],
      mended: [{ part: 'Drain pump', source: 'used', at: '2026-03-05T12:00:00Z', by: 'Wil' }],
      signedOffAt: '2026-03-05T15:10:00Z',
      signedOffBy: 'Maren',
      fourEyes: true,
      warrantyMonths: 12,
      cautions: ['68 kg: two people to lift.', 'Earthed socket only.', 'Unplug before opening anything: hot water, moving parts.'],
      shop: { name: 'Millrace Mend', address: '12 Dyehouse Yard', phone: '01632 960412' },
      ...change,
    },
    state: { number: '0412-2', standing: 'stands', signedOffAt: '2026-03-05T15:10:00Z' },
    url: `https://tags.millrace.example/t/0412-2/${'aB3_x-9Z'.repeat(11).slice(0, 86)}`,
    jws: 'e30.e30.e30',
    ...page,
  });
}
