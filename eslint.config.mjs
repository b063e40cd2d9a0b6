import nextVitals from 'eslint-config-next/core-web-vitals';
import nextTypescript from 'eslint-config-next/typescript';
import { importX } from 'eslint-plugin-import-x';
import checkFile from 'eslint-plugin-check-file';

/** Who may import whom: `target` may not import from `from`, save what `except` names. */
const zones = [
  // The pure core knows nothing of the rest.
  { target: './lib/templates', from: '.', except: ['./lib/templates', './node_modules'] },
  { target: './lib/sampler', from: '.', except: ['./lib/sampler', './node_modules'] },
  {
    target: './lib/inference',
    from: '.',
    except: ['./lib/inference', './lib/templates', './lib/sampler', './node_modules'],
  },
  { target: './lib/statement', from: '.', except: ['./lib/statement', './lib/figures', './node_modules'] },
  {
    target: './lib/measurements',
    from: '.',
    // One incomplete beta function for all.
    except: ['./lib/measurements', './lib/sampler/special-functions.ts', './node_modules'],
  },
  { target: './lib/figures', from: '.', except: ['./lib/figures', './node_modules'] },
  {
    target: './lib/schemas',
    from: '.',
    except: ['./lib/schemas', './lib/statement', './lib/templates', './node_modules'],
  },
  // Pages draw; they reach data through services by way of lib/http.
  {
    target: './components',
    from: '.',
    except: [
      './components',
      './lib/figures',
      './lib/schemas',
      './lib/templates',
      './lib/inference',
      './lib/measurements',
      './lib/statement',
      './node_modules',
    ],
  },
  { target: './app', from: './models' },
  { target: './app', from: './worker' },
  { target: './app', from: './storage' },
  { target: './models', from: '.', except: ['./models', './node_modules'] },
  { target: './migrations', from: '.', except: ['./migrations', './node_modules'] },
  { target: './lib/presenters', from: './lib/services' },
  { target: './lib/policies', from: './lib/services' },
  { target: './lib/services', from: './app' },
  { target: './lib/services', from: './worker' },
  { target: './lib/services', from: './components' },
  { target: './lib/jobs', from: './worker' },
  { target: './worker', from: './app' },
  { target: './worker', from: './components' },
].map((zone) => ({
  ...zone,
  message: 'This import goes against the arrows of docs/architecture.md.',
}));

const pure = [
  'lib/templates/**',
  'lib/sampler/**',
  'lib/inference/**',
  'lib/measurements/**',
  'lib/figures/**',
  'lib/statement/**',
];

const config = [
  { ignores: ['.next/**', 'dist/**', '.state*/**', 'node_modules/**', 'next-env.d.ts'] },
  ...nextVitals,
  ...nextTypescript,
  {
    files: ['**/*.{ts,tsx,mts,mjs}'],
    plugins: { 'import-x': importX, 'check-file': checkFile },
    settings: { 'import-x/resolver': { typescript: { project: './tsconfig.json' } } },
    rules: {
      'max-lines': ['error', { max: 400 }],
      'import-x/no-restricted-paths': ['error', { zones }],
      'import-x/no-cycle': 'error',
      'check-file/filename-naming-convention': [
        'error',
        { '**/*.{ts,tsx,mts,mjs}': '+([a-z0-9.\\-\\[\\]])' },
        { ignoreMiddleExtensions: true },
      ],
      'check-file/filename-blocklist': [
        'error',
        { '**/{utils,util,helpers,helper,misc,common}.*': '**/what-it-does.*' },
      ],
      '@typescript-eslint/no-explicit-any': 'error',
      '@typescript-eslint/consistent-type-imports': 'error',
      eqeqeq: 'error',
      'no-console': 'error',
    },
  },
  {
    files: pure,
    rules: {
      'no-restricted-globals': ['error', 'process', 'window', 'document', 'performance', 'Buffer', 'fetch'],
      'no-restricted-imports': ['error', { patterns: ['node:*', 'react', 'next', 'next/*', 'sequelize'] }],
      'no-restricted-syntax': [
        'error',
        {
          selector: "MemberExpression[object.name='Math'][property.name='random']",
          message: 'Randomness is an argument.',
        },
        {
          selector: "MemberExpression[object.name='Date'][property.name='now']",
          message: 'The pure core has no clock.',
        },
        { selector: "NewExpression[callee.name='Date']", message: 'The pure core has no clock.' },
      ],
    },
  },
  { files: ['scripts/**'], rules: { 'no-console': 'off' } },
];

export default config;
