import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import tailwindcss from '@tailwindcss/vite';
import react from '@vitejs/plugin-react';
import { defineConfig, type Plugin } from 'vite';

/**
 * What is loaded and never called in the browser, because something that is called refers to it: zod's way to JSON schemas (only the
 * server's OpenAPI has them), and the words of errors that stdlib throws at callers without types. Together a twentieth of what a phone
 * fetches before it shows its first page.
 */
const withoutWhatIsNeverCalled: Plugin = {
  name: 'without-what-is-never-called',
  enforce: 'pre',
  load(id) {
    if (/\/@stdlib\/string-format\/lib\/index\.js$/.test(id)) return 'module.exports = String;';
    if (!/\/zod\/v4\/core\/(?:to-json-schema|json-schema-processors)\.js$/.test(id)) return undefined;
    const names = [...readFileSync(id, 'utf8').matchAll(/^export (?:const|function|class) (\w+)/gm)].map(([, name]) => name);
    return ['const nothing = () => undefined;', ...names.map((name) => `export const ${name} = nothing;`)].join('\n');
  },
};

/** The router's package gives every bundler its development build, with the checks and warnings of that. */
const routerAsServed = (file: string): string =>
  fileURLToPath(new URL(`node_modules/react-router/dist/production/${file}.mjs`, import.meta.url));

export default defineConfig({
  plugins: [withoutWhatIsNeverCalled, react(), tailwindcss()],
  resolve: {
    alias: [
      { find: /^react-router$/, replacement: routerAsServed('index') },
      { find: /^react-router\/dom$/, replacement: routerAsServed('dom-export') },
    ],
  },
  build: { outDir: 'dist/web', emptyOutDir: true, sourcemap: false },
  server: { host: '127.0.0.1', port: 5173, strictPort: true, proxy: { '/api': { target: 'http://127.0.0.1:4780' } } },
});
