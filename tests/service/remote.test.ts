import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { frontPage, plainPaper } from '../../src/cli/index.js';
import { acceptedJobSchema, jobListSchema, sheetSchema } from '../../src/contract/index.js';
import { canonicalText } from '../../src/study/index.js';
import { build, type Circumstances, type Ended, heddle } from './built-program.js';
import {
  answer,
  changeId,
  done,
  eventStream,
  hangUp,
  jobId,
  json,
  problem,
  progress,
  record,
  StandIn,
  type Studied,
  studySingleLoop,
} from './remote-server.js';
import { Scratch } from './scratch.js';

const scratch = new Scratch();
const here = (...path: string[]): string => join(scratch.folder, ...path);
let studied: Studied;
let server: StandIn;

beforeAll(async () => {
  build();
  studied = await studySingleLoop();
  scratch.write({
    'job.json': studied.text,
    'faulty.json': '{ "format": "heddle-job/1", "x": 1 }',
  });
});
beforeEach(async () => {
  server = await StandIn.start(studied);
});
afterEach(() => server.close());
afterAll(() => scratch.remove());

/** Runs a command against the test's server. */
const ask = (parameters: readonly string[], circumstances: Circumstances = {}): Promise<Ended> =>
  heddle(parameters, { ...circumstances, environment: { HEDDLE_SERVER: server.url } });

const events = `GET /api/jobs/${jobId}/events`;

describe('submit', () => {
  it('hands in the very bytes and says the id and where to look', async () => {
    const { code, stdout, stderr } = await ask(['submit', here('job.json')]);
    expect(code).toBe(0);
    expect(stderr).toBe('');
    expect(stdout).toContain(`accepted as job ${jobId}`);
    expect(stdout).toContain(`${server.url}/#/jobs/${jobId}`);
    const [heard] = server.requests('POST /api/jobs');
    expect(heard?.body).toBe(studied.text);
    expect(heard?.headers['content-type']).toBe('application/json');
  });

  it('answers in JSON with the accepted job alone', async () => {
    const { code, stdout } = await ask(['submit', '-', '--json'], { stdin: studied.text });
    expect(code).toBe(0);
    expect(acceptedJobSchema.parse(JSON.parse(stdout)).job.id).toBe(jobId);
  });

  it('gives every fault of a refused document a line, as a local command does', async () => {
    const there = await ask(['submit', here('faulty.json')]);
    const local = await heddle(['check', here('faulty.json')]);
    expect(there.code).toBe(2);
    expect(there.stderr).toBe(local.stderr);
    expect(there.stderr).toContain('has 3 faults');
    const listed = await ask(['submit', here('faulty.json'), '--json']);
    expect(listed.code).toBe(2);
    expect(JSON.parse(listed.stdout).faults).toHaveLength(3);
  });

  it('tries again under the same key when the connection breaks', async () => {
    server.next('POST /api/jobs', hangUp, hangUp);
    const { code, stdout } = await ask(['submit', here('job.json')]);
    expect(code).toBe(0);
    expect(stdout).toContain(jobId);
    const keys = server.requests('POST /api/jobs').map(({ headers }) => headers['idempotency-key']);
    expect(keys).toHaveLength(3);
    expect(new Set(keys).size).toBe(1);
  });

  it('gives the key to go on with when it cannot know whether the job was accepted', async () => {
    server.next('POST /api/jobs', hangUp);
    const parameters = ['submit', here('job.json'), '--key', 'mine', '--patience', '0'];
    const { code, stderr } = await ask(parameters);
    expect(code).toBe(1);
    expect(stderr).toContain('not known whether the job was accepted');
    expect(stderr).toContain('--key mine');
  });

  it('says that a job under the same key was accepted before', async () => {
    const parameters = ['submit', here('job.json'), '--key', 'mine'];
    expect((await ask(parameters)).stdout).toContain('accepted as job');
    expect((await ask(parameters)).stdout).toContain('accepted before as job');
  });

  it('follows the job to its end where asked to', async () => {
    const { code, stdout, stderr } = await ask(['submit', here('job.json'), '--watch']);
    expect(code).toBe(0);
    expect(stderr).toContain('stage 1 of 6');
    expect(stdout).toContain('done: 3 alternatives');
  });
});

describe('watch', () => {
  it('shows a line a stage and ends with the job', async () => {
    server.events = [
      record({ state: 'accepted', progress: null }),
      record(),
      record({ progress: progress(1, 'ends of the front') }),
      record(done),
    ];
    const { code, stdout, stderr } = await ask(['watch', jobId]);
    expect(code).toBe(0);
    expect(stderr).toMatch(/waiting to begin\n.*stage 1 of 6, preparing.*\n.*stage 2 of 6, ends/);
    expect(stdout).toBe(`done: 3 alternatives in 12 s. heddle front ${jobId} shows them\n`);
  });

  const endings = [
    { what: 'that nothing meets the limits', ending: { ...done, feasible: false }, code: 3 },
    {
      what: 'why a job failed',
      ending: { state: 'failed', failure: { code: 'TASK_FAILED', message: 'no memory' } },
      code: 1,
    },
    {
      what: 'who cancelled it',
      ending: { state: 'cancelled', cancelled: { person: 'Shift lead', reason: 'not needed' } },
      code: 1,
    },
  ] as const;
  for (const { what, ending, code } of endings) {
    it(`says ${what}, and ends with ${code}`, async () => {
      server.events = [record(ending)];
      const told = await ask(['watch', jobId]);
      expect(told.code).toBe(code);
      expect(told.stdout).toMatch(
        /No tuning meets the limits|failed: no memory \(TASK_FAILED\)|cancelled by Shift lead: not needed/,
      );
    });
  }

  it('goes on where the stream breaks, and where the server starts anew', async () => {
    server.next(
      events,
      eventStream([record()]),
      hangUp,
      problem('STOPPING', 'the server is stopping'),
      eventStream([record()], 'breaks'),
    );
    const { code, stdout, stderr } = await ask(['watch', jobId]);
    expect(code).toBe(0);
    expect(stdout).toContain('done: 3 alternatives');
    expect(stderr).toContain('the connection broke; trying again');
    expect(server.requests(events)).toHaveLength(5);
  });

  it('says that work was handed out anew', async () => {
    server.events = [record(), record({ epoch: 2 }), record({ ...done, epoch: 2 })];
    const { stderr } = await ask(['watch', jobId]);
    expect(stderr.match(/handed out anew/g)).toHaveLength(1);
  });

  it('gives up on a server that stays away, naming it', async () => {
    server.next(events, eventStream([record()]));
    const { code, stderr } = await ask(['watch', jobId, '--patience', '0']);
    expect(code).toBe(1);
    expect(stderr).toContain(`${server.url}: it closes the connection`);
  });

  it('stops on Ctrl-C and leaves the job alone', async () => {
    server.next(events, eventStream([record()], 'stays'));
    let sent = false;
    const { code, stdout, stderr } = await ask(['watch', jobId], {
      onNotes: (notes, child) => {
        if (notes.includes('stage 1') && !sent) sent = child.kill('SIGINT');
      },
    });
    expect(code).toBe(130);
    expect(stdout).toBe('');
    expect(stderr).toContain('the job goes on');
    expect(server.heard.map(({ method }) => method)).toEqual(['GET']);
  });

  it('knows at once that there is no such job', async () => {
    server.next(events, problem('JOB_UNKNOWN', `there is no job ${jobId}`));
    const { code, stderr } = await ask(['watch', jobId]);
    expect(code).toBe(2);
    expect(stderr).toBe(`There is no such job: there is no job ${jobId}\n`);
  });
});

describe('front', () => {
  it('prints the page that solve prints of it', async () => {
    const { code, stdout } = await ask(['front', jobId]);
    expect(code).toBe(0);
    expect(stdout).toContain(frontPage(studied.outcome.front, studied.job, plainPaper));
    expect(stdout).toContain('1 234 tuning sets evaluated in 12 s, 20 s of processor time');
  });

  it('gives the bytes of the front untouched, to standard output and to a file', async () => {
    const bytes = canonicalText(studied.outcome.front);
    const { stdout } = await ask(['front', jobId, '--json', '--out', here('front.json')]);
    expect(stdout).toBe(bytes);
    expect(readFileSync(here('front.json'), 'utf8')).toBe(bytes);
  });

  it("writes every scored set's own document to a folder", async () => {
    const { code } = await ask(['front', jobId, '--responses', here('responses')]);
    expect(code).toBe(0);
    const { details } = studied.outcome;
    expect(readdirSync(here('responses')).sort()).toEqual(
      details.map(({ id }) => `${id}.json`).sort(),
    );
    const [first] = details;
    expect(readFileSync(here('responses', `${first?.id}.json`), 'utf8')).toBe(canonicalText(first));
  });

  it('refuses documents that are not those the front was made with', async () => {
    const [first] = studied.outcome.details;
    server.next(`GET /api/jobs/${jobId}/alternatives/A01`, json(200, { ...first, id: 'A02' }));
    const parameters = ['front', jobId, '--out', here('no.json'), '--responses', here('no')];
    const details = await ask(parameters);
    expect(details.code).toBe(1);
    expect(details.stderr).toContain('the document of A01 is not the one');
    expect(existsSync(here('no.json'))).toBe(false);
    server.next(`GET /api/jobs/${jobId}/document`, json(200, `${studied.text} `));
    const job = await ask(['front', jobId]);
    expect(job.code).toBe(1);
    expect(job.stderr).toContain('the job document is not the one');
  });

  it('says that there is none yet', async () => {
    server.next(
      `GET /api/jobs/${jobId}/front`,
      problem('FRONT_NOT_READY', `job ${jobId} is running`),
    );
    const { code, stderr } = await ask(['front', jobId]);
    expect(code).toBe(1);
    expect(stderr).toBe(`The job has no front yet: job ${jobId} is running\n`);
  });

  it('ends with 3 where nothing meets the limits', async () => {
    const none = { ...studied.outcome.front, alternatives: [], binding: [] };
    server.next(`GET /api/jobs/${jobId}/front`, json(200, none));
    expect((await ask(['front', jobId, '--json'])).code).toBe(3);
  });
});

describe('jobs and cancel', () => {
  it('list jobs with how they stand, in words and in JSON', async () => {
    const { code, stdout } = await ask(['jobs', '--state', 'done', '--limit', '5']);
    expect(code).toBe(0);
    expect(stdout).toMatch(new RegExp(`${jobId} +done +3 +2026-03-01 08:00 +12 s +Feed heater`));
    expect(stdout).toMatch(/running 0 %/);
    expect(server.heard[0]?.path).toBe('/api/jobs?state=done&limit=5');
    const listed = await ask(['jobs', '--json']);
    expect(jobListSchema.parse(JSON.parse(listed.stdout)).jobs).toHaveLength(2);
  });

  it('cancel with the person and the reason on the record', async () => {
    const act = ['--person', 'Shift lead', '--reason', 'wrong column'];
    const { code, stdout } = await ask(['cancel', jobId, ...act]);
    expect(code).toBe(0);
    expect(stdout).toBe(`job ${jobId} is cancelled\n`);
    const [heard] = server.requests(`POST /api/jobs/${jobId}/cancel`);
    expect(JSON.parse(heard?.body ?? '')).toEqual({ person: 'Shift lead', reason: 'wrong column' });
    await ask(['cancel', jobId]);
    expect(server.requests(`POST /api/jobs/${jobId}/cancel`)[1]?.body).toBe('{}');
  });
});

describe('a change', () => {
  const act = (person: string): string[] => ['--person', person, '--reason', 'calmer'];

  it('is proposed, approved and taken away as a sheet in three forms', async () => {
    const proposed = await ask(['propose', jobId, 'A02', ...act('Loop engineer')]);
    expect(proposed.code).toBe(0);
    expect(proposed.stdout).toContain(`change ${changeId} is proposed: alternative A02`);
    const before = await ask(['sheet', changeId]);
    expect(before.stdout).toContain('PROPOSED, NOT APPROVED');
    const approved = await ask(['approve', changeId, ...act('Area lead')]);
    expect(approved.stdout).toContain(`change ${changeId} is approved`);
    expect(approved.stdout).toContain('by Area lead');

    const text = await ask(['sheet', changeId]);
    expect(text.code).toBe(0);
    expect(text.stdout).toContain('APPROVED');
    expect(text.stdout).toMatch(/gain +%\/degC +1\.2/);
    const document = await ask(['sheet', changeId, '--format', 'json']);
    expect(sheetSchema.parse(JSON.parse(document.stdout)).change.decided?.person).toBe('Area lead');
    const csv = await ask(['sheet', changeId, '--format', 'csv', '--out', here('sheet.csv')]);
    expect(csv.stdout).toBe('');
    expect(readFileSync(here('sheet.csv'), 'utf8')).toBe('loop,setting\r\n');
  });

  it('is turned down by reject', async () => {
    await ask(['propose', jobId, 'A01', ...act('Loop engineer')]);
    const { code, stdout } = await ask(['reject', changeId, ...act('Area lead'), '--json']);
    expect(code).toBe(0);
    expect(JSON.parse(stdout)).toMatchObject({ state: 'rejected', id: changeId });
  });

  it('needs a person and a reason, and names of the right shape, before anything is asked', async () => {
    for (const parameters of [
      ['approve', changeId],
      ['propose', jobId, '7', ...act('Loop engineer')],
      ['approve', jobId, ...act('Area lead')],
      ['watch', 'J1'],
      ['sheet', changeId, '--format', 'pdf'],
    ]) {
      const { code, stderr } = await ask(parameters);
      expect(code).toBe(2);
      expect(stderr).toContain('; allowed: ');
    }
    expect(server.heard).toEqual([]);
  });
});

describe('an address', () => {
  it('where nothing listens is named, with what to do', async () => {
    const { url } = server;
    await server.close();
    const { code, stdout, stderr } = await heddle(['submit', here('job.json'), '--server', url]);
    server = await StandIn.start(studied);
    expect(code).toBe(1);
    expect(stdout).toBe('');
    expect(stderr).toBe(
      `${url}: nothing listens there; allowed: a Heddle server that runs there: start one with heddle serve, or name another with --server\n`,
    );
  });

  it('where something else answers is said to be none of ours', async () => {
    const page = '<html>not here</html>';
    server.next(
      'GET /api/jobs',
      answer(404, 'text/html', page),
      answer(200, 'text/html', page),
      json(200, { jobs: 'many' }),
      json(200, '{ not JSON'),
      answer(302, 'text/html', '', { location: 'http://127.0.0.1:1/login' }),
    );
    for (const words of [/404 with text\/html/, /text\/html/, /jobs/, /whole of it/, /login/]) {
      const { code, stdout, stderr } = await ask(['jobs']);
      expect(code).toBe(1);
      expect(stdout).toBe('');
      expect(stderr).toMatch(words);
      expect(stderr).toContain('not a Heddle server');
    }
  });

  it('may stand below a path, and by environment', async () => {
    const below = await heddle(['jobs'], {
      environment: { HEDDLE_SERVER: `${server.url}/heddle` },
    });
    expect(below.code).toBe(2);
    expect(server.heard[0]?.path).toBe('/heddle/api/jobs?limit=20');
  });

  it('that is none is refused', async () => {
    for (const address of ['ftp://127.0.0.1', 'here']) {
      const { code, stderr } = await heddle(['jobs', '--server', address]);
      expect(code).toBe(2);
      expect(stderr).toContain('--server');
    }
  });

  it('with a server that has too much to do is told as the server tells it', async () => {
    server.next('POST /api/jobs', problem('BUSY', '100 jobs wait'));
    const { code, stderr } = await ask(['submit', here('job.json')]);
    expect(code).toBe(1);
    expect(stderr).toBe('Too much is waiting already: 100 jobs wait\n');
  });
});
