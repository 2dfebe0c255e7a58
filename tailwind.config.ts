import type { Config } from 'tailwindcss';

const token = (name: string): string => `var(--${name})`;

/** Colours are custom properties (web/look.css), so that the night bench changes values and never the markup. */
export default {
  content: ['./index.html', './web/**/*.{ts,tsx}'],
  darkMode: ['selector', '[data-theme="night"]'],
  theme: {
    extend: {
      colors: Object.fromEntries(
        [
          'enamel',
          'sheet',
          'frit',
          'chart',
          'grid',
          'line',
          'edge',
          'ink',
          'ink2',
          'rim',
          'frame',
          'pass',
          'fail',
          'unsure',
          'pass-ground',
          'fail-ground',
          'unsure-ground',
          'lamp-green',
          'lamp-red',
          'lamp-amber',
          'lamp-white',
          'lamp-blue',
        ].map((name) => [name, token(name)]),
      ),
      fontFamily: { mono: token('mono'), read: token('read') },
      screens: { wide: '761px' },
    },
  },
} satisfies Config;
