import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';

const packages = ['python3-numpy', 'python3-scipy'];
const places = ['/usr/bin/python3', 'python3'];

const has = (python: string): boolean =>
  spawnSync(python, ['-c', 'import numpy, scipy'], { stdio: 'ignore' }).status === 0;

/** A Python with numpy and scipy: Debian's, installed where that is permitted; else says what to install. */
export function findPython(): string | undefined {
  const there = places.find(has);
  if (there !== undefined) return there;
  const script = fileURLToPath(
    new URL('../../../src/bootstrap/install-debian.sh', import.meta.url),
  );
  if (process.getuid?.() === 0) {
    spawnSync('sh', [script, '/usr/sbin/policy-rc.d', ...packages], { stdio: 'ignore' });
  }
  const now = places.find(has);
  if (now === undefined) {
    process.stderr.write(
      `this comparison needs Python 3 with numpy and scipy; on Debian: sudo apt-get install ${packages.join(' ')}\n`,
    );
  }
  return now;
}
