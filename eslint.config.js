import js from '@eslint/js';
import tseslint from 'typescript-eslint';

/**
 * Imports go one way: shared <- cli, server, web. A path is judged by its shape, so a new folder needs no new line here:
 * `../` that climbs out of a house and into another is refused, and a feature may not reach into the feature beside it.
 */
const fromHouse = (house, others) => ({
  files: [`${house}/**/*.{ts,tsx}`],
  rules: {
    'no-restricted-imports': ['error', { patterns: [
      { regex: `^(\\.\\./)+(${others.join('|')})/`, message: `${house} may not import from ${others.join(', ')}: imports go one way, shared <- cli, server, web.` },
      { regex: '^\\.\\./(?!\\.\\.)(?!shared/)[a-z-]+/[a-z-]+-(service|store|routes)\\.js$', message: 'A feature never imports a feature: lift what both need.' },
      ...(house === 'shared' || house === 'web'
        ? [{ regex: '^(node:|fs$|path$|crypto$|http$|net$|os$|child_process$)', message: `${house} runs in a browser: no Node modules.` }]
        : []),
      ...(house === 'web' ? [{ regex: '^(\\.\\./)+features/(?!.*\\.\\./)', message: 'Features never import features: pages compose them.' }] : []),
    ] }],
  },
});

export default tseslint.config(
  { ignores: ['dist/**', 'node_modules/**', '.data/**'] },
  js.configs.recommended,
  ...tseslint.configs.recommendedTypeChecked,
  {
    languageOptions: { parserOptions: { projectService: true, tsconfigRootDir: import.meta.dirname } },
    rules: {
      '@typescript-eslint/no-floating-promises': 'error',
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
      'no-restricted-syntax': ['error', { selector: 'ExportDefaultDeclaration', message: 'Named exports only.' }],
    },
  },
  { files: ['*.config.{ts,js}'], rules: { 'no-restricted-syntax': 'off' } },
  { files: ['**/*.js', '**/*.mjs'], ...tseslint.configs.disableTypeChecked },
  fromHouse('shared', ['cli', 'server', 'web', 'migrations', 'tests']),
  fromHouse('cli', ['server', 'web', 'migrations', 'tests']),
  fromHouse('server', ['cli', 'web', 'tests']),
  fromHouse('web', ['cli', 'server', 'migrations', 'tests']),
  {
    files: ['shared/**/*.ts'],
    rules: {
      // Pure: no clock, no chance. What flows in is an argument.
      'no-restricted-properties': ['error', { object: 'Math', property: 'random', message: 'shared is pure: pass the number in.' }, { object: 'Date', property: 'now', message: 'shared is pure: pass the time in.' }],
      'no-restricted-globals': ['error', 'process', 'window', 'document', 'fetch', 'setTimeout', 'setInterval', 'crypto', 'performance'],
    },
  },
);
