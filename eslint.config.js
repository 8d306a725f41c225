import tseslint from 'typescript-eslint';

/**
 * Import directions of the house: commands -> screen, report, stand -> record, adapters -> engine -> stats.
 * `text` (cleaning, sentences of errors) lies below all but engine and stats, which import nothing else.
 */
const LAYERS = {
  'src/stats': [],
  'src/engine': ['stats'],
  'src/text': [],
  'src/record': ['engine', 'stats', 'text'],
  adapters: ['engine', 'stats', 'text'],
  'src/stand': ['record', 'adapters', 'engine', 'stats', 'text'],
  'src/screen': ['engine', 'stats', 'text'],
  'src/report': ['engine', 'stats', 'text'],
};
const ROOMS = ['stats', 'engine', 'text', 'record', 'adapters', 'stand', 'screen', 'report', 'commands', 'main'];

const layer = ([folder, may]) => {
  const own = folder.split('/').at(-1);
  const closed = ROOMS.filter((room) => room !== own && !may.includes(room));
  const patterns = [
    {
      regex: `^(\\.\\./)+(src/)?(${closed.join('|')})(/|\\.js$)`,
      message: `${folder} may import only from: ${[own, ...may].join(', ')}.`,
    },
  ];
  const pure = own === 'stats' || own === 'engine';
  if (pure) patterns.push({ regex: '^(?!\\.)', message: `${folder} is pure: no packages, no node modules.` });
  return {
    files: [`${folder}/**/*.ts`],
    rules: {
      'no-restricted-imports': ['error', { patterns }],
      ...(pure && {
        'no-restricted-globals': ['error', 'process', 'performance', 'setTimeout', 'setInterval', 'setImmediate', 'console', 'fetch'],
        'no-restricted-properties': [
          'error',
          { object: 'Math', property: 'random', message: 'The engine has no randomness.' },
          { object: 'Date', property: 'now', message: 'Time is an input.' },
        ],
      }),
    },
  };
};

export default tseslint.config(
  { ignores: ['dist/', 'node_modules/', 'coverage/'] },
  {
    files: ['**/*.ts'],
    extends: [tseslint.configs.strictTypeChecked],
    languageOptions: { parserOptions: { projectService: true, tsconfigRootDir: import.meta.dirname } },
    rules: {
      '@typescript-eslint/no-floating-promises': 'error',
      '@typescript-eslint/no-misused-promises': 'error',
      '@typescript-eslint/no-non-null-assertion': 'off', // indexed access of typed arrays in loops whose bounds are plain to see
      '@typescript-eslint/restrict-template-expressions': ['error', { allowNumber: true }],
      '@typescript-eslint/no-confusing-void-expression': ['error', { ignoreArrowShorthand: true }],
      '@typescript-eslint/no-unnecessary-condition': ['error', { allowConstantLoopConditions: 'only-allowed-literals' }],
      '@typescript-eslint/consistent-type-imports': 'error',
      eqeqeq: 'error',
      'no-var': 'error',
      'prefer-const': 'error',
    },
  },
  { files: ['tests/**/*.ts'], rules: { '@typescript-eslint/unbound-method': 'off' } }, // expectations name methods without calling them
  ...Object.entries(LAYERS).map(layer),
);
