import { createHash } from 'node:crypto';
import { readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

/** The folders whose code decides what a result is; everything else only carries it. */
const calculation = [
  'base',
  'contract',
  'controllers',
  'frequency',
  'numerics',
  'responses',
  'scoring',
  'search',
  'simulation',
  'study',
] as const;

/**
 * The version of the calculation: equal versions give equal bytes for equal jobs.
 *
 * SHA-256 over the Node version and the path and bytes of every file of the calculation, in the order
 * of their paths, source maps set aside.
 * @param source  the folder that holds the calculation's folders; this program's own where not given
 * @param node  the version of Node that runs it
 * @returns 64 hexadecimal digits
 */
export function computeVersion(
  source: URL = new URL('../', import.meta.url),
  node: string = process.version,
): string {
  const digest = createHash('sha256').update(`${node}\0`);
  for (const folder of calculation) {
    for (const path of filesBelow(new URL(`${folder}/`, source))) {
      const bytes = readFileSync(new URL(`${folder}/${path}`, source));
      digest.update(`${folder}/${path}\0${bytes.length}\0`).update(bytes);
    }
  }
  return digest.digest('hex');
}

/** Paths of all files below a folder, with forward slashes, in one order on every machine. */
function filesBelow(folder: URL): string[] {
  const entries = readdirSync(fileURLToPath(folder), { recursive: true, withFileTypes: true });
  return entries
    .filter((entry) => entry.isFile() && !entry.name.endsWith('.map'))
    .map((entry) => pathBelow(fileURLToPath(folder), `${entry.parentPath}/${entry.name}`))
    .sort((a, b) => (a < b ? -1 : 1));
}

const pathBelow = (folder: string, path: string): string =>
  path.replaceAll('\\', '/').slice(folder.length).replace(/^\/+/, '');
