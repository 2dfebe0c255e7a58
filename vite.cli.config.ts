import { defineConfig } from 'vite';

// The program for the terminal, in a few files: finding and opening some thirty at each start took longer than running them.
// What every command needs is inside; whatever is loaded for a few of them stays a package, and a file of its own here.
export default defineConfig({
  ssr: { noExternal: ['chalk', 'commander', 'yaml', 'zod'] },
  build: { ssr: 'cli/main.ts', outDir: 'dist/cli', emptyOutDir: true },
});
