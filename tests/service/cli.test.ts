import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import {
  closeSync,
  existsSync,
  openSync,
  readdirSync,
  readFileSync,
  truncateSync,
  writeFileSync,
} from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { tryOutFolder } from '../../src/cli/result-files.js';
import {
  alternativeDetailSchema,
  evaluationSchema,
  type FrontDocument,
  frontSchema,
} from '../../src/contract/index.js';
import type { Loose } from '../documents.js';
import { build, type Ended, heddle } from './built-program.js';
import { faultyJobs } from './faulty-jobs.js';
import { checkout, Scratch } from './scratch.js';
import { singleLoop } from './single-loop.js';

const escapeCharacter = String.fromCharCode(27);
const scratch = new Scratch();
const { folder } = scratch;
const entry = join(checkout, 'dist/src/cli/main.js');
const here = (...path: string[]): string => join(folder, ...path);

const jobWith = (change: (job: Loose) => void): string => {
  const job: Loose = singleLoop();
  change(job);
  return JSON.stringify(job);
};

/** Too much gain for any model, and too little change allowed to mend it. */
const beyondRepair = jobWith((job) => {
  job.loops[0].present.gain = 40;
  job.loops[0].maxChange = 1.1;
});

beforeAll(() => {
  build();
  scratch.write({
    'job.json': JSON.stringify(singleLoop()),
    'unstable.json': beyondRepair,
    'folder/inside.json': '{}',
    'wild.json': jobWith((job) => {
      job[`${escapeCharacter}[31mred`] = 1;
    }),
  });
  writeFileSync(here('large.json'), '');
  truncateSync(here('large.json'), 100_000_000);
});
afterAll(() => scratch.remove());

/** The faults a command in JSON mode answers with, as code and path. */
const faultsOf = ({ stdout }: Ended): string[] =>
  (JSON.parse(stdout) as { faults: { code: string; path: string }[] }).faults.map(
    ({ code, path }) => `${code} ${path}`,
  );

describe('a document that cannot be accepted', () => {
  for (const { what, text, code, path } of faultyJobs) {
    it(`${what} ends with exit code 2 and names the place`, async () => {
      writeFileSync(here('faulty.json'), text);
      const told = await heddle(['check', here('faulty.json')]);
      expect(told.code).toBe(2);
      expect(told.stdout).toBe('');
      expect(told.stderr).toContain(`\n${path === '' ? 'document' : path}`);
      expect(told.stderr).toContain('; allowed: ');
      expect(told.stderr).not.toMatch(/^\s+at /m);
      const json = await heddle(['check', here('faulty.json'), '--json']);
      expect(json.code).toBe(2);
      expect(json.stderr).toBe('');
      expect(faultsOf(json)).toContain(`${code} ${path}`);
    });
  }

  it('every fault of a document has a line of its own', async () => {
    const text = jobWith((job) => {
      job.unit.responses[0].model.deadTime = -1;
      job.loops[0].present.gain = 0;
      job.extra = true;
    });
    const { stderr } = await heddle(['check', '-'], { stdin: text });
    const [heading, ...lines] = stderr.trimEnd().split('\n');
    expect(heading).toBe('standard input is not accepted: it has 3 faults');
    expect(lines).toHaveLength(3);
    for (const line of lines) expect(line).toMatch(/^\S.*: .+; found .+; allowed: .+/);
  });

  it('100 MB are refused by their size, from a file and from standard input', async () => {
    const file = await heddle(['check', here('large.json'), '--json']);
    expect(file.code).toBe(2);
    expect(faultsOf(file)).toEqual(['DOCUMENT_TOO_LARGE ']);
    const handle = openSync(here('large.json'), 'r');
    const piped = await heddle(['check', '-', '--json'], { stdin: handle });
    closeSync(handle);
    expect(piped.code).toBe(2);
    expect(faultsOf(piped)).toEqual(['DOCUMENT_TOO_LARGE ']);
  });

  it('characters that a terminal would act on are written as escapes', async () => {
    const inside = await heddle(['check', here('wild.json')]);
    expect(inside.code).toBe(2);
    const named = await heddle(['check', here(`${escapeCharacter}[2J.json`)]);
    expect(named.code).toBe(2);
    const option = await heddle(['check', `--${escapeCharacter}[2J`]);
    expect(option.code).toBe(2);
    for (const { stderr } of [inside, named, option]) {
      expect(stderr).not.toContain(escapeCharacter);
      expect(stderr).toContain('\\u{1b}');
    }
  });

  it('a file that is not there, a folder and a settings file that is not there are named', async () => {
    const absent = await heddle(['check', here('absent.json')]);
    expect(absent.code).toBe(2);
    expect(absent.stderr).toContain('absent.json: there is no such file');
    const directory = await heddle(['evaluate', folder]);
    expect(directory.code).toBe(2);
    expect(directory.stderr).toContain(`${folder}: this is a folder`);
    const settings = await heddle(['evaluate', here('job.json'), '--settings', here('none.json')]);
    expect(settings.code).toBe(2);
    expect(settings.stderr).toContain('none.json: there is no such file');
  });
});

describe('a command that is not given rightly', () => {
  const wrong: readonly (readonly [string, readonly string[], NodeJS.ProcessEnv?])[] = [
    ['no command', []],
    ['an unknown command', ['chek', 'job.json']],
    ['a command without its document', ['check']],
    ['an unknown option', ['check', 'job.json', '--colour']],
    ['one document too many', ['check', 'job.json', 'job.json']],
    ['no threads', ['solve', 'job.json', '--out', 'front.json', '--threads', '0']],
    ['half a thread', ['solve', 'job.json', '--out', 'front.json', '--threads', '1.5']],
    ['solve without a place for its front', ['solve', 'job.json']],
    ['the job as the place for its own front', ['solve', 'job.json', '--out', './job.json']],
    ['both documents from standard input', ['evaluate', '-', '--settings', '-']],
    ['threads by environment that are no number', ['check', 'job.json'], { HEDDLE_THREADS: 'x' }],
    ['a switch by environment that is none', ['check', 'job.json'], { HEDDLE_JSON: 'maybe' }],
  ];
  for (const [what, parameters, environment] of wrong) {
    it(`${what} ends with exit code 2, in words and in JSON`, async () => {
      const told = await heddle(parameters, { folder, environment: environment ?? {} });
      expect(told.code).toBe(2);
      expect(told.stdout).toBe('');
      expect(told.stderr).not.toMatch(/^\s+at /m);
      const json = await heddle([...parameters, '--json'], {
        folder,
        environment: environment ?? {},
      });
      if (environment?.['HEDDLE_JSON'] !== undefined) return;
      expect(json.code).toBe(2);
      expect(faultsOf(json)[0]).toMatch(/^OPTION_INVALID /);
    });
  }

  it('help is an answer, not a failure', async () => {
    const { code, stdout, stderr } = await heddle(['solve', '--help']);
    expect(code).toBe(0);
    expect(stdout).toContain('HEDDLE_OUT');
    expect(stderr).toBe('');
  });
});

describe('check', () => {
  it('says what the document holds, what will be run and what is assumed', async () => {
    const { code, stdout, stderr } = await heddle(['check', here('job.json')]);
    expect(code).toBe(0);
    expect(stderr).toBe('');
    expect(stdout).toContain('Feed heater outlet');
    expect(stdout).toContain('1 to retune');
    expect(stdout).toMatch(/horizon +60 min/);
    expect(stdout).toContain('20 % on gain and dead time is taken');
    for (const line of stdout.split('\n')) expect(line.length).toBeLessThanOrEqual(80);
  });

  it('answers in JSON with the hash of the bytes it read', async () => {
    const { code, stdout } = await heddle(['check', here('job.json')], {
      environment: { HEDDLE_JSON: '1' },
    });
    expect(code).toBe(0);
    const bytes = readFileSync(here('job.json'));
    expect(JSON.parse(stdout)).toMatchObject({
      job: createHash('sha256').update(bytes).digest('hex'),
      loops: { retune: 1 },
      run: { horizon: 60, scan: 0.25 },
      reference: 'present',
    });
  });
});

describe('evaluate', () => {
  it('answers in JSON with an evaluation document and nothing else', async () => {
    const { code, stdout, stderr } = await heddle(['evaluate', '-', '--json'], {
      stdin: JSON.stringify(singleLoop()),
    });
    expect(code).toBe(0);
    expect(stderr).toBe('');
    const evaluation = evaluationSchema.parse(JSON.parse(stdout));
    expect(evaluation.scored.objectives.speed).toBeCloseTo(1, 12);
    expect(evaluation.responses).toHaveLength(2);
  });

  it('scores other settings by the same yardstick', async () => {
    scratch.write({ 'slower.json': '{ "TC-101": { "gain": 0.6, "integral": 8 } }' });
    const parameters = ['evaluate', here('job.json'), '--settings', here('slower.json')];
    const { code, stdout } = await heddle([...parameters, '--json']);
    expect(code).toBe(0);
    const { scored } = evaluationSchema.parse(JSON.parse(stdout));
    expect(scored.settings).toEqual({ 'TC-101': { gain: 0.6, integral: 8 } });
    expect(scored.objectives.speed).toBeGreaterThan(1.5);
    const byEnvironment = await heddle(['evaluate', here('job.json'), '--json'], {
      environment: { HEDDLE_SETTINGS: here('slower.json') },
    });
    expect(byEnvironment.stdout).toBe(stdout);
  });

  it('refuses settings of a loop the job does not have', async () => {
    scratch.write({ 'strange.json': '{ "TC-999": { "gain": 1, "integral": 1 } }' });
    const parameters = ['evaluate', here('job.json'), '--settings', here('strange.json')];
    const { code, stderr } = await heddle(parameters);
    expect(code).toBe(2);
    expect(stderr).toContain('strange.json is not accepted');
    expect(stderr).toContain('TC-101');
  });

  it('says plainly that settings are unstable, which is an answer', async () => {
    const { code, stdout } = await heddle(['evaluate', here('unstable.json')]);
    expect(code).toBe(0);
    expect(stdout).toContain('unstable on the nominal unit');
  });

  it('names the limits that are broken', async () => {
    const strict = jobWith((job) => {
      job.loops[0].limits.settlingTime = 2;
    });
    const { stdout } = await heddle(['evaluate', '-'], { stdin: strict });
    expect(stdout).toMatch(/1 of 3 broken/);
    expect(stdout).toMatch(/TC-101 +settling time +at most 2 min/);
  });

  it('ends quietly when its reader has left', async () => {
    const { code, signal, stderr } = await heddle(['evaluate', here('job.json'), '--json'], {
      onStart: (child) => child.stdout?.destroy(),
    });
    expect({ code, signal, stderr }).toEqual({ code: 0, signal: null, stderr: '' });
  });

  it.skipIf(!existsSync('/dev/full'))('says that standard output has no room left', () => {
    const full = openSync('/dev/full', 'w');
    const { status, stderr } = spawnSync(process.execPath, [entry, 'evaluate', here('job.json')], {
      stdio: ['ignore', full, 'pipe'],
      encoding: 'utf8',
    });
    closeSync(full);
    expect(stderr).toBe('standard output: there is no room left\n');
    expect(status).toBe(1);
  });

  it('writes no colours where there is no terminal', async () => {
    const { stdout } = await heddle(['evaluate', here('job.json')], {
      environment: { TERM: 'xterm' },
    });
    expect(stdout).not.toContain(escapeCharacter);
  });
});

describe('solve', () => {
  const solve = (name: string, ...more: readonly string[]): Promise<Ended> =>
    heddle(['solve', here('job.json'), '--out', here(name), ...more]);
  let first: Ended;

  beforeAll(async () => {
    first = await solve('one.json', '--responses', here('one'), '--threads', '1');
  });

  it('writes a front and prints it with what it cost', () => {
    expect(first.code).toBe(0);
    const front = frontSchema.parse(JSON.parse(readFileSync(here('one.json'), 'utf8')));
    expect(front.job).toBe(
      createHash('sha256')
        .update(readFileSync(here('job.json')))
        .digest('hex'),
    );
    expect(front.alternatives.length).toBeGreaterThan(0);
    for (const { id } of front.alternatives) expect(first.stdout).toContain(`\n  ${id}`);
    expect(first.stdout).toMatch(/tuning sets evaluated in .+ on 1 thread, .+ of processor time/);
    const page = first.stdout.slice(0, first.stdout.indexOf('front document: '));
    for (const line of page.split('\n')) expect(line.length).toBeLessThanOrEqual(80);
  });

  it('tells of each stage on a line of the notes, and of nothing else there', () => {
    const lines = first.stderr.trimEnd().split('\n');
    expect(lines.length).toBeGreaterThan(3);
    for (const line of lines) expect(line).toMatch(/^heddle: \d+:\d\d {2}stage \d of \d, /);
  });

  it('writes the document of everything scored with the hash that the front names', () => {
    const front = JSON.parse(readFileSync(here('one.json'), 'utf8')) as FrontDocument;
    const present = { id: 'present', detail: front.present?.detail };
    const scored = [...front.alternatives, ...front.baselines, present];
    expect(readdirSync(here('one')).sort()).toEqual(scored.map(({ id }) => `${id}.json`));
    for (const { id, detail } of scored) {
      const bytes = readFileSync(here('one', `${id}.json`));
      expect(createHash('sha256').update(bytes).digest('hex')).toBe(detail);
      expect(alternativeDetailSchema.parse(JSON.parse(bytes.toString())).id).toBe(id);
    }
  });

  it('gives the same bytes on one thread and on two, to a file and to standard output', async () => {
    const { code, stdout } = await solve('two.json', '--threads', '2', '--json');
    expect(code).toBe(0);
    const bytes = readFileSync(here('one.json'), 'utf8');
    expect(readFileSync(here('two.json'), 'utf8')).toBe(bytes);
    const answer = JSON.parse(stdout) as { front: FrontDocument; cost: { evaluations: number } };
    expect(answer.front).toEqual(JSON.parse(bytes));
    expect(answer.cost.evaluations).toBeGreaterThan(0);
  });

  it('leaves no draft of a file behind', () => {
    expect(readdirSync(folder).filter((name) => name.startsWith('.'))).toEqual([]);
  });

  it('ends with exit code 3 and the reasons when nothing meets the limits', async () => {
    const { code, stdout } = await heddle([
      'solve',
      here('unstable.json'),
      '--out',
      here('no.json'),
    ]);
    expect(code).toBe(3);
    expect(stdout).toContain('No tuning meets the limits');
    expect(stdout).toContain('What stands in the way');
    const front = frontSchema.parse(JSON.parse(readFileSync(here('no.json'), 'utf8')));
    expect(front.alternatives).toEqual([]);
    expect(front.infeasible?.words.length).toBeGreaterThan(0);
  });

  it('refuses a place that cannot be written before it computes anything', async () => {
    const places = [
      ['--out', here('no-such-folder', 'front.json')],
      ['--out', here('job.json', 'front.json')],
      ['--out', here('folder')],
      ['--out', here('front.json'), '--responses', here('job.json')],
    ];
    for (const place of places) {
      const { code, stdout, stderr } = await heddle(['solve', here('job.json'), ...place]);
      expect(code).toBe(1);
      expect(stdout).toBe('');
      expect(stderr).toMatch(/^--(out|responses) \(.+\): .+; allowed: a place where files can be/);
      expect(stderr).not.toContain('stage');
    }
    expect(existsSync(here('front.json'))).toBe(false);
  });

  it.skipIf(!existsSync('/proc/self'))('refuses a folder that no one can make', async () => {
    for (const place of ['/proc/heddle', '/proc/heddle/responses']) {
      const parameters = ['--out', here('front.json'), '--responses', place];
      const { code, stderr } = await heddle(['solve', here('job.json'), ...parameters]);
      expect(code).toBe(1);
      expect(stderr).toMatch(/^--responses \(\/proc\/heddle.*\): /);
    }
  });

  it('makes a folder for responses with those above it, one by one', async () => {
    await tryOutFolder('--responses', here('above', 'below', 'responses'));
    await tryOutFolder('--responses', here('above', 'below', 'responses'));
    expect(readdirSync(here('above', 'below', 'responses'))).toEqual([]);
  });

  it('stops on Ctrl-C, says so and leaves nothing behind', async () => {
    const long = jobWith((job) => {
      job.search = { alternatives: 60, effort: 'deep', models: 32 };
    });
    let sent = false;
    const { code, stdout, stderr } = await heddle(['solve', '-', '--out', here('stopped.json')], {
      stdin: long,
      onNotes: (notes, child) => {
        if (notes.includes('stage 2') && !sent) sent = child.kill('SIGINT');
      },
    });
    expect(code).toBe(130);
    expect(stdout).toBe('');
    expect(stderr).toContain('stopped before it was done');
    expect(stderr).not.toContain('Warning');
    expect(existsSync(here('stopped.json'))).toBe(false);
  });
});
