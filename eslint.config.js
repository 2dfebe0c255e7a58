import { builtinModules } from 'node:module';
import { dirname, relative, resolve, sep } from 'node:path';
import js from '@eslint/js';
import tseslint from 'typescript-eslint';

const root = import.meta.dirname;

/** Pure and small: what shared may take from outside. */
const packagesOfShared = /^(zod|yaml|@stdlib\/stats-base-dists-normal-cdf)$/;
const isNodeModule = (source) => source.startsWith('node:') || builtinModules.includes(source.split('/')[0]);

/** `server/features/tags/tag-store.ts` is in the house `server` and the feature `tags`. */
function placeOf(path) {
  const parts = relative(root, path).split(sep);
  const house = parts.length > 1 ? parts[0] : undefined;
  return { house, feature: parts[1] === 'features' && parts.length > 3 ? parts[2] : undefined };
}

/** What is wrong with importing `source` from `file`, or undefined. An import is judged by where it leads, not by how it is written. */
function wrongImport(file, source) {
  const from = placeOf(file);
  if (!source.startsWith('.')) {
    if ((from.house === 'shared' || from.house === 'web') && isNodeModule(source))
      return `${from.house} runs in a browser: no Node modules.`;
    if (from.house === 'shared' && !packagesOfShared.test(source)) return 'shared imports zod, yaml, one distribution function and itself.';
    return undefined;
  }
  const to = placeOf(resolve(dirname(file), source));
  if (from.house === to.house) {
    if (from.feature === undefined || to.feature === undefined || from.feature === to.feature) return undefined;
    return 'A feature never imports a feature: lift what both need, or let a page compose them.';
  }
  if (from.house === 'shared') return 'shared imports nothing but itself.';
  if (to.house === undefined || to.house === 'shared') return undefined;
  if (from.house === 'server' && to.house === 'migrations') return undefined;
  return `Imports go one way, shared <- cli, server, web: ${from.house} may not import from ${to.house}.`;
}

/** One rule for every house, with no list of folders: static, dynamic and type imports, and re-exports. */
const importsGoOneWay = {
  meta: { type: 'problem', schema: [] },
  create(context) {
    const check = (node) => {
      const { source } = node;
      if (source?.type !== 'Literal' || typeof source.value !== 'string') return;
      const message = wrongImport(context.filename, source.value);
      if (message) context.report({ node: source, message });
    };
    return {
      ImportDeclaration: check,
      ExportNamedDeclaration: check,
      ExportAllDeclaration: check,
      ImportExpression: check,
      TSImportType: check,
    };
  },
};

const namedExportsOnly = { selector: 'ExportDefaultDeclaration', message: 'Named exports only.' };
const noClock = { selector: "NewExpression[callee.name='Date'][arguments.length=0]", message: 'shared is pure: pass the time in.' };

export default tseslint.config(
  { ignores: ['dist/**', 'node_modules/**', '.data/**'] },
  js.configs.recommended,
  ...tseslint.configs.recommendedTypeChecked,
  {
    languageOptions: { parserOptions: { projectService: true, tsconfigRootDir: root } },
    rules: {
      '@typescript-eslint/no-floating-promises': 'error',
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
      'no-restricted-syntax': ['error', namedExportsOnly],
    },
  },
  { files: ['*.config.{ts,js}'], rules: { 'no-restricted-syntax': 'off' } },
  { files: ['**/*.js', '**/*.mjs'], ...tseslint.configs.disableTypeChecked },
  {
    files: ['{shared,cli,server,web,migrations}/**/*.{ts,tsx}'],
    plugins: { house: { rules: { 'imports-go-one-way': importsGoOneWay } } },
    rules: { 'house/imports-go-one-way': 'error' },
  },
  {
    files: ['shared/**/*.ts'],
    rules: {
      // Pure: no clock, no chance, no machine. What flows in is an argument.
      'no-restricted-syntax': ['error', namedExportsOnly, noClock],
      'no-restricted-properties': [
        'error',
        { object: 'Math', property: 'random', message: 'shared is pure: pass the number in.' },
        { object: 'Date', property: 'now', message: 'shared is pure: pass the time in.' },
      ],
      'no-restricted-globals': [
        'error',
        ...['process', 'Buffer', 'window', 'document', 'navigator', 'localStorage', 'fetch', 'crypto', 'performance'],
        ...['setTimeout', 'setInterval', 'setImmediate', 'queueMicrotask'],
      ],
    },
  },
  { files: ['web/**/*.{ts,tsx}'], rules: { 'no-restricted-globals': ['error', 'process', 'Buffer', 'require'] } },
);
