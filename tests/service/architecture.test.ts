import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { run } from './program.js';
import { checkout, Scratch } from './scratch.js';

type Diagnostic = {
  readonly category: string;
  readonly location: { readonly path: string; readonly start: { readonly line: number } };
};
type Violation = {
  readonly rule: { readonly name: string };
  readonly from: string;
  readonly to: string;
};

/** A small program that breaks every rule of the layers once, and otherwise keeps to them. */
const wronged = {
  'src/base/index.ts': "export const seed = 1;\nexport { first } from './first.js';\n",
  'src/base/first.ts':
    "import { second } from './second.js';\nexport const first = () => second;\n",
  'src/base/second.ts': "import { first } from './first.js';\nexport const second = () => first;\n",
  'src/contract/index.ts': "import 'node:path';\nexport type Job = string;\n",
  'src/numerics/index.ts':
    "import type { Model } from '../responses/index.js';\nexport type Matrix = Model;\n",
  'src/responses/index.ts': "export type { Model } from './model.js';\n",
  'src/responses/model.ts':
    "import 'node:fs';\nimport '../base/index.js';\nexport type Model = 1;\n",
  'src/search/index.ts': "import 'nowhere-to-be-found';\nexport { step } from './step.js';\n",
  'src/search/step.ts': 'export const step = 1;\n',
  'src/search/left-over.ts': 'export const unused = 1;\n',
  'src/study/index.ts': `
    import 'node:crypto';
    import 'node:fs/promises';
    import { step } from '../search/step.js';
    import { step as door } from '../search/index.js';
    export const study = step + door;
  `,
  'src/web/index.ts': `
    import type { Job } from '../contract/index.js';
    import { study } from '../study/index.js';
    export const page = (job: Job) => [job, study];
  `,
  'src/cli/index.ts': `
    import 'only-for-development';
    import '../../tests/probe.js';
    import '../../workers/solve.js';
  `,
  'src/stray/index.ts': "import '../base/index.js';\n",
  'workers/solve.ts': "import '../src/study/index.js';\nimport '../src/search/index.js';\n",
  'tests/probe.ts': "import { step } from '../src/search/step.js';\nexport const probe = step;\n",
  'package.json': '{ "devDependencies": { "only-for-development": "1.0.0" } }',
  'node_modules/only-for-development/package.json':
    '{ "name": "only-for-development", "version": "1.0.0", "main": "index.js" }',
  'node_modules/only-for-development/index.js': 'module.exports = 1;\n',
};

describe('the check of the layers', () => {
  const scratch = new Scratch();
  let found: readonly string[] = [];

  beforeAll(async () => {
    scratch.borrow('tsconfig.json', '.dependency-cruiser.cjs');
    scratch.write(wronged);
    const cruise = join(checkout, 'node_modules/dependency-cruiser/bin/dependency-cruise.mjs');
    const { answer } = await run(
      process.execPath,
      [
        cruise,
        'src',
        'workers',
        'tests',
        '--config',
        '.dependency-cruiser.cjs',
        '--output-type',
        'json',
      ],
      // The configuration asks for the parser, which lies with the other packages of the checkout.
      { folder: scratch.folder, environment: { NODE_PATH: join(checkout, 'node_modules') } },
    );
    const { summary } = JSON.parse(answer) as { summary: { violations: readonly Violation[] } };
    found = summary.violations.map(({ rule, from, to }) => `${rule.name}: ${from} -> ${to}`);
  });
  afterAll(() => scratch.remove());

  const expected = {
    'an upward import, even of a type alone':
      'layer-numerics: src/numerics/index.ts -> src/responses/index.ts',
    'a page that reaches the server': 'layer-web: src/web/index.ts -> src/study/index.ts',
    'a program that needs its tests': 'layer-cli: src/cli/index.ts -> tests/probe.ts',
    'a program that imports a worker': 'layer-cli: src/cli/index.ts -> workers/solve.ts',
    'a worker that passes its layer': 'layer-workers: workers/solve.ts -> src/search/index.ts',
    'a folder entered beside its door': 'front-door: src/study/index.ts -> src/search/step.ts',
    'a folder that no layer knows': 'known-folders: src/stray/index.ts -> src/base/index.ts',
    'two modules that need each other': 'no-cycles: src/base/first.ts -> src/base/second.ts',
    'a module nobody uses': 'no-orphans: src/search/left-over.ts -> src/search/left-over.ts',
    'a calculation that reads files': 'calculation-is-pure: src/responses/model.ts -> fs',
    'a study that reads files': 'study-is-quiet: src/study/index.ts -> fs/promises',
    'Node in what the browser runs': 'browser-ready: src/contract/index.ts -> path',
    'a package that is there for development alone':
      'no-development-packages: src/cli/index.ts -> node_modules/only-for-development/index.js',
    'an import of nothing': 'resolvable: src/search/index.ts -> nowhere-to-be-found',
  };

  it.each(Object.entries(expected))('refuses %s', (_, violation) => {
    expect(found).toContain(violation);
  });

  it('refuses nothing else', () => {
    const violations: readonly string[] = Object.values(expected);
    expect(found.filter((violation) => !violations.includes(violation))).toEqual([]);
  });
});

describe('the check of the style', () => {
  const scratch = new Scratch();
  /** What calculation may not write, and the rule that says so. */
  const denied: Readonly<Record<string, string>> = {
    'new Date()': 'lint/style/noRestrictedGlobals',
    'Date.now()': 'lint/style/noRestrictedGlobals',
    'performance.now()': 'lint/style/noRestrictedGlobals',
    'process.hrtime()': 'lint/style/noRestrictedGlobals',
    'crypto.randomUUID()': 'lint/style/noRestrictedGlobals',
    'Math.random()': 'plugin',
    "new Error('x')": 'plugin',
    "new TypeError('x')": 'plugin',
  };
  const calculation = [
    'numerics',
    'responses',
    'controllers',
    'simulation',
    'frequency',
    'scoring',
    'search',
    'study',
  ];
  let found: readonly string[] = [];

  beforeAll(async () => {
    const lines = Object.keys(denied).map((code, index) => `export const v${index} = ${code};`);
    const probe = `${lines.join('\n')}\n`;
    scratch.borrow('biome.json', 'lint', '.gitignore', 'tsconfig.json');
    scratch.write(
      Object.fromEntries([...calculation, 'cli'].map((name) => [`src/${name}/probe.ts`, probe])),
    );
    scratch.write({
      'src/cli/floating.ts': `
        const later = async (): Promise<void> => {};
        export const now = (): void => {
          later();
        };
      `,
      'src/cli/half.ts': `
        export function pick(kind: 'one' | 'two'): number {
          switch (kind) {
            case 'one':
              return 1;
          }
          return 0;
        }
      `,
    });
    const biome = join(checkout, 'node_modules/@biomejs/biome/bin/biome');
    const { answer } = await run(
      process.execPath,
      [biome, 'lint', '--colors=off', '--max-diagnostics=none', '--reporter=json'],
      { folder: scratch.folder },
    );
    const { diagnostics } = JSON.parse(answer) as {
      diagnostics: readonly Diagnostic[];
    };
    found = diagnostics.map(
      ({ category, location }) => `${category}: ${location.path}:${location.start.line}`,
    );
  });
  afterAll(() => scratch.remove());

  it.each(calculation)('refuses clocks, chance and uncoded errors in %s', (folder) => {
    const here = found.filter((place) => place.includes(`src/${folder}/`));
    const wanted = Object.values(denied).map(
      (rule, index) => `${rule}: src/${folder}/probe.ts:${index + 1}`,
    );
    expect(here.toSorted()).toEqual(wanted.toSorted());
  });

  it('refuses a promise that nobody waits for', () => {
    expect(found).toContain('lint/nursery/noFloatingPromises: src/cli/floating.ts:4');
  });

  it('refuses a switch that forgets a case', () => {
    expect(found).toContain('lint/nursery/useExhaustiveSwitchCases: src/cli/half.ts:3');
  });

  it('lets a skin read the clock', () => {
    expect(found.filter((place) => place.includes('src/cli/probe.ts'))).toEqual([]);
  });
});
