/**
 * Who may import whom. Every rule about folders is generated from this table: a folder may import
 * itself, `base`, and what stands behind its name; a folder that is not in the table may not exist.
 * Nothing that is shipped imports tests, and nothing in src imports workers.
 */
const mayImport = {
  base: [],
  contract: [],
  numerics: [],
  responses: ['numerics'],
  controllers: ['numerics'],
  search: ['numerics'],
  simulation: ['numerics', 'responses', 'controllers'],
  frequency: ['numerics', 'responses', 'controllers'],
  scoring: ['numerics', 'responses', 'controllers', 'simulation', 'frequency'],
  study: [
    'contract',
    'numerics',
    'responses',
    'controllers',
    'search',
    'simulation',
    'frequency',
    'scoring',
  ],
  records: ['contract'],
  queue: ['contract'],
  spreadsheet: ['contract'],
  compute: ['contract', 'study', 'spreadsheet'],
  service: ['contract', 'study', 'compute', 'records', 'queue'],
  api: ['contract', 'service'],
  cli: ['contract', 'study', 'spreadsheet', 'compute', 'service', 'api'],
  demo: ['contract', 'cli'],
  web: ['contract'],
  bootstrap: [],
  workers: ['contract', 'study', 'compute'],
};

/** The parser is asked for plain TypeScript alone, and the page has markup in its files. */
const swc = require('@swc/core');
const { parseFileSync } = swc;
swc.parseFileSync = (file, options) =>
  parseFileSync(file, { ...options, tsx: file.endsWith('.tsx') });

/** Folders that only calculate: no input, no output, no clock. */
const calculation = [
  'numerics',
  'responses',
  'controllers',
  'search',
  'simulation',
  'frequency',
  'scoring',
];

const pathOf = (folder) => (folder === 'workers' ? '^workers/' : `^src/${folder}/`);
const anyOf = (folders) => `^src/(${folders.join('|')})/`;
const sourceFolders = Object.keys(mayImport).filter((folder) => folder !== 'workers');

const layers = Object.entries(mayImport).map(([folder, others]) => ({
  name: `layer-${folder}`,
  comment: `${folder} may import ${[...new Set(['base', ...others])].join(', ')} and itself`,
  severity: 'error',
  from: { path: pathOf(folder) },
  to: {
    path: '^(src|workers|tests)/',
    pathNot: [pathOf(folder), anyOf(['base', ...others])],
  },
}));

/** @type {import('dependency-cruiser').IConfiguration} */
module.exports = {
  forbidden: [
    ...layers,
    {
      name: 'known-folders',
      comment: 'Every folder in src has its line in the table of layers',
      severity: 'error',
      from: { path: '^src/', pathNot: anyOf(sourceFolders) },
      to: {},
    },
    {
      name: 'front-door',
      comment: 'A folder is entered through its index.ts',
      severity: 'error',
      from: { path: '^(src/[^/]+|workers)/' },
      to: {
        path: '^src/',
        pathNot: ['^$1/', '^src/[^/]+/index[.]ts$'],
      },
    },
    {
      name: 'no-cycles',
      comment: 'Two modules that need each other are one module, or three',
      severity: 'error',
      from: {},
      to: { circular: true },
    },
    {
      name: 'no-orphans',
      comment: 'A module that nothing uses and that uses nothing is left over',
      severity: 'error',
      from: { orphan: true, path: '^(src|workers)/', pathNot: '[.]d[.]ts$' },
      to: {},
    },
    {
      name: 'browser-ready',
      comment: 'What the page shares with the server runs without Node',
      severity: 'error',
      from: {
        path: anyOf(['base', 'contract', 'web']),
        pathNot: '^src/web/vite[.]config[.]ts$',
      },
      to: { dependencyTypes: ['core'] },
    },
    {
      name: 'calculation-is-pure',
      comment: 'Calculation does no input or output and reads no clock',
      severity: 'error',
      from: { path: anyOf(calculation) },
      to: { dependencyTypes: ['core'] },
    },
    {
      name: 'study-is-quiet',
      comment: 'A study opens no file, no socket and no process, and reads no clock',
      severity: 'error',
      from: { path: pathOf('study') },
      to: {
        dependencyTypes: ['core'],
        path: '^(node:)?(fs|net|tls|dgram|dns|http|https|http2|child_process|cluster|readline|perf_hooks|timers)(/|$)',
      },
    },
    {
      name: 'no-development-packages',
      comment: 'What is shipped uses only the packages that are installed with it',
      severity: 'error',
      from: { path: '^(src|workers)/', pathNot: '^src/web/vite[.]config[.]ts$' },
      to: { dependencyTypes: ['npm-dev', 'npm-no-pkg', 'npm-unknown'] },
    },
    {
      name: 'resolvable',
      comment: 'Every import leads somewhere',
      severity: 'error',
      from: {},
      to: { couldNotResolve: true },
    },
  ],
  options: {
    exclude: { path: '^(dist|coverage)/' },
    doNotFollow: { path: 'node_modules' },
    parser: 'swc',
    tsPreCompilationDeps: true,
    tsConfig: { fileName: 'tsconfig.json' },
    detectProcessBuiltinModuleCalls: true,
    enhancedResolveOptions: {
      exportsFields: ['exports'],
      conditionNames: ['import', 'node', 'types', 'default'],
    },
  },
};
