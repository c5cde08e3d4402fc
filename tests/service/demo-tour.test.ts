import { once } from 'node:events';
import { readFileSync } from 'node:fs';
import { createServer } from 'node:net';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type FrontDocument, sheetSchema } from '../../src/contract/index.js';
import { bestCompromise } from '../../src/demo/best-compromise.js';
import { freePortFrom } from '../../src/demo/free-port.js';
import { build } from './built-program.js';
import { alternative, front } from './front-example.js';
import { type Ending, run } from './program.js';
import { checkout, Scratch } from './scratch.js';
import { singleLoop } from './single-loop.js';

const demo = join(checkout, 'dist/src/demo/main.js');

describe('the demonstration', () => {
  const scratch = new Scratch();
  beforeAll(() => {
    build();
    scratch.write({ 'job.json': JSON.stringify(singleLoop()) });
  });
  afterAll(() => scratch.remove());

  const tour = (onOutput: Parameters<typeof run>[2]['onOutput'] = () => {}): Promise<Ending> =>
    run(process.execPath, [demo, '--once', '--port', '0', '--job', 'job.json'], {
      folder: scratch.folder,
      onOutput,
    });
  const result = (name: string): string =>
    readFileSync(join(scratch.folder, 'demo-results', name), 'utf8');

  it('takes a job to an approved sheet, goes on where it was stopped, and remembers it the next time', async () => {
    let sent = false;
    const stopped = await tour((output, send) => {
      if (sent || !output.includes('waiting to begin')) return;
      sent = true;
      send('SIGINT');
    });
    expect(stopped.code).toBe(130);
    expect(stopped.output).toContain('what was accepted goes on at the next start');

    const first = await tour();
    expect(first.code).toBe(0);
    expect(first.output).toMatch(/job J\w+ was not done when it was stopped, and goes on/);
    expect(first.answer).toContain('3 alternatives for the tuning of this unit');
    const sheet = sheetSchema.parse(JSON.parse(result('change-sheet.json')));
    expect(sheet.change.state).toBe('approved');
    expect(sheet.change.proposed.person).not.toBe(sheet.change.decided?.person);
    expect(result('change-sheet.txt')).toContain(`Change sheet ${sheet.change.id}`);
    expect(result('change-sheet.csv')).toContain('TC-101');
    const found = result('front.json');

    const second = await tour();
    expect(second.code).toBe(0);
    expect(second.answer).toContain(sheet.change.job);
    expect(second.output).toContain(`the same front as that of job ${sheet.change.job}`);
    expect(result('front.json')).toBe(found);
  }, 600_000);

  it('tells how it is called where it is called wrongly', async () => {
    for (const wrong of [['--ones'], ['--port', 'http'], ['--job', 'absent.json']]) {
      const { code, output } = await run(process.execPath, [demo, ...wrong], {
        folder: scratch.folder,
      });
      expect(code).toBe(2);
      expect(output).toContain('npm run demo -- [--once]');
    }
  });
});

describe('the best compromise', () => {
  const withObjectives = (...pairs: readonly (readonly [number, number])[]): FrontDocument =>
    front({
      alternatives: pairs.map(([speed, robustness], k) => ({
        ...alternative(k + 1),
        objectives: { speed, robustness },
      })),
    });

  it('is nearest to the best of both, however far apart their scales are', () => {
    const bent = withObjectives([1000, 1.2], [300, 1.3], [250, 2], [200, 3]);
    expect(bestCompromise(bent)?.id).toBe('A02');
  });

  it('is the first where all are alike, and none where there is none', () => {
    expect(bestCompromise(withObjectives([1, 2], [1, 2]))?.id).toBe('A01');
    expect(bestCompromise(withObjectives())).toBeUndefined();
  });
});

describe('a free port', () => {
  it('is the next one where the first is taken', async () => {
    const server = createServer().listen(0, '127.0.0.1');
    await once(server, 'listening');
    const address = server.address();
    const taken = typeof address === 'object' && address !== null ? address.port : 0;
    expect(await freePortFrom(taken)).toBeGreaterThan(taken);
    server.close();
    await once(server, 'close');
    expect(await freePortFrom(taken)).toBe(taken);
  });
});
