/**
 * How well an embedded server serves while it solves: event-loop delay and requests a second, idle and
 * while a job runs, in one run. Run by `npm run bench:serving` on the built program.
 */
import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as pause } from 'node:timers/promises';
import { fileURLToPath } from 'node:url';
import autocannon from 'autocannon';

const root = fileURLToPath(new URL('../..', import.meta.url));
const seconds = 10;
const document = readFileSync(join(root, 'src/demo/solvent-recovery-column.json'));
const folder = mkdtempSync(join(tmpdir(), 'heddle-bench-'));

const server = spawn(
  process.execPath,
  [
    '--import',
    new URL('./loop-delay.mjs', import.meta.url).href,
    join(root, 'dist/src/cli/main.js'),
    'serve',
    '--port',
    '0',
    '--data',
    join(folder, 'data'),
  ],
  { stdio: ['ignore', 'ignore', 'pipe'] },
);
let said = '';
server.stderr.setEncoding('utf8').on('data', (text) => {
  said += text;
});

/** @param {RegExp} pattern */
async function hear(pattern) {
  for (;;) {
    const match = pattern.exec(said);
    if (match) {
      said = said.slice(match.index + match[0].length);
      return match;
    }
    await once(server.stderr, 'data');
  }
}

async function loopDelay() {
  server.kill('SIGUSR2');
  const match = await hear(/loop delay (.*)\n/);
  return JSON.parse(match[1] ?? '');
}

/**
 * @param {string} when
 * @param {string} url
 */
async function measure(when, url) {
  await loopDelay();
  await pause(1000 * seconds);
  const alone = await loopDelay();
  const load = await autocannon({ url, connections: 10, duration: seconds });
  const loaded = await loopDelay();
  return {
    when,
    'loop delay p50, ms': alone.p50,
    'loop delay p99, ms': alone.p99,
    'loop delay max, ms': alone.max,
    'requests/s': load.requests.average,
    'latency p50, ms': load.latency.p50,
    'latency p99, ms': load.latency.p99,
    'loop delay p99 under load, ms': loaded.p99,
    failures: load.non2xx + load.errors,
  };
}

try {
  const [, url = ''] = await hear(/serving at (\S+)/);
  const idle = await measure('idle', `${url}/api/jobs`);
  const headers = { 'content-type': 'application/json' };
  const answer = await fetch(`${url}/api/jobs`, { method: 'POST', headers, body: document });
  const { job } = /** @type {{ job: { id: string } }} */ (await answer.json());
  await pause(2000);
  const solving = await measure('solving', `${url}/api/jobs`);
  const now = await fetch(`${url}/api/jobs/${job.id}`);
  const { state } = /** @type {{ state: string }} */ (await now.json());
  console.table([idle, solving].map((row) => ({ ...row })));
  console.log(`the job was ${state} at the end`);
  const ratio = solving['requests/s'] / idle['requests/s'];
  console.log(`requests a second while solving against idle: ${ratio.toFixed(2)}`);
} finally {
  server.kill('SIGKILL');
  await once(server, 'exit');
  rmSync(folder, { recursive: true, force: true });
}
