import { randomUUID } from 'node:crypto';
import { mkdir, open, readdir, realpath, rename, rm, stat, writeFile } from 'node:fs/promises';
import { basename, dirname, join, resolve } from 'node:path';
import { printable } from './printable.js';
import { exitCode, Refusal } from './refusal.js';

/**
 * Files that results go to. A target is tried out before the work that fills it begins, and a file
 * is whole or not there: it is written beside its place and moved in one step.
 */

/**
 * Makes sure that a file can be written, without touching what it holds.
 * @throws {Refusal} naming the option, the path and the reason
 */
export async function tryOutFile(option: string, path: string): Promise<void> {
  try {
    const about = await statOf(path);
    if (about?.isDirectory()) throw unwritable(option, path, { code: 'EISDIR' });
    if (about !== null && !about.isFile()) return;
    await tryOutFolderOf(await whereTo(path));
  } catch (error) {
    throw error instanceof Refusal ? error : unwritable(option, path, error);
  }
}

/**
 * Makes sure that files can be written to a folder, which is made where it is missing.
 * @throws {Refusal} naming the option, the path and the reason
 */
export async function tryOutFolder(option: string, path: string): Promise<void> {
  try {
    if (path === '') throw Object.assign(new Error('no folder is named'), { code: 'ENOENT' });
    await makeFolder(resolve(path));
    await tryOutFolderOf(join(path, 'document.json'));
  } catch (error) {
    throw error instanceof Refusal ? error : unwritable(option, path, error);
  }
}

/**
 * Makes a folder and those above it that are missing, one by one: told to make them all, the system's
 * call never comes back in a file system that refuses new folders as though their parent were missing.
 */
async function makeFolder(path: string): Promise<void> {
  const missing: string[] = [];
  let about = await statOf(path);
  for (let place = path; about === null; about = await statOf(place)) {
    missing.unshift(place);
    place = dirname(place);
  }
  if (!about.isDirectory()) throw Object.assign(new Error('a file'), { code: 'EEXIST' });
  for (const place of missing) {
    await mkdir(place).catch((error: { code?: string }) => {
      if (error.code !== 'ENOENT') throw error;
      throw Object.assign(new Error('takes no folders'), { code: 'no folders' });
    });
  }
}

async function tryOutFolderOf(path: string): Promise<void> {
  const trial = neighbourOf(path);
  await writeFile(trial, '', { flag: 'wx' });
  await rm(trial, { force: true });
}

/**
 * Writes a file in one step; a pipe or device is written to as it is.
 * @throws {Refusal} naming the option, the path and the reason
 */
export async function writeWhole(
  option: string,
  path: string,
  content: string | Uint8Array,
): Promise<void> {
  try {
    const about = await statOf(path);
    if (about !== null && !about.isFile()) {
      await writeFile(path, content);
      return;
    }
    await moveIntoPlace(await whereTo(path), content);
  } catch (error) {
    throw error instanceof Refusal ? error : unwritable(option, path, error);
  }
}

async function moveIntoPlace(target: string, content: string | Uint8Array): Promise<void> {
  const draft = neighbourOf(target);
  try {
    const handle = await open(draft, 'wx');
    try {
      await handle.writeFile(content);
      await handle.sync();
    } finally {
      await handle.close();
    }
    await rename(draft, target);
  } catch (error) {
    await rm(draft, { force: true });
    throw error;
  }
}

/** True when both paths lead to one file that exists. */
export async function isSameFile(a: string, b: string): Promise<boolean> {
  const [first, second] = await Promise.all([a, b].map((path) => stat(path).catch(() => null)));
  if (!first || !second) return false;
  return first.dev === second.dev && first.ino === second.ino;
}

/** Notes that a folder also holds documents of alternatives that are not among those just written. */
export async function tellLeftOver(folder: string, written: ReadonlySet<string>): Promise<void> {
  const others = (await readdir(folder))
    .filter((name) => /^(A\d{2,3}|B\d{2})\.json$/.test(name) && !written.has(name))
    .sort();
  if (others.length === 0) return;
  const names = others.length > 3 ? `${others.slice(0, 3).join(', ')}, ...` : others.join(', ');
  process.stderr.write(
    `heddle: ${printable(folder)} also holds documents of an earlier front: ${names}\n`,
  );
}

/** The file itself where the path is a link to it. */
const whereTo = (path: string): Promise<string> => realpath(path).catch(() => resolve(path));

const neighbourOf = (path: string): string =>
  join(dirname(path), `.${basename(path)}.${randomUUID()}.part`);

const statOf = (path: string) =>
  stat(path).catch((error: { code?: string }) => {
    if (error.code === 'ENOENT') return null;
    throw error;
  });

const reasons: Readonly<Record<string, readonly [problem: string, value: string]>> = {
  ENOENT: ['its folder does not exist', 'no such folder'],
  ENOTDIR: ['its folder does not exist', 'a path through something that is no folder'],
  EEXIST: ['this is not a folder', 'a file'],
  EISDIR: ['this is a folder', 'a folder'],
  EACCES: ['nothing may be written there', 'no permission'],
  EPERM: ['nothing may be written there', 'no permission'],
  EROFS: ['nothing can be written there', 'a file system that is read only'],
  ENOSPC: ['there is no room left', 'a full file system'],
  'no folders': ['no folder can be made there', 'a file system that takes no new folders'],
  ENAMETOOLONG: ['there can be no such file', 'a name that is too long'],
};

/** Why a result could not be written, from what the system said. */
function unwritable(option: string, path: string, error: unknown): Refusal {
  const code = String((error as { code?: unknown }).code ?? error);
  const [problem, value] = reasons[code] ?? ['this cannot be written', code];
  const complaint = {
    code: 'FILE_UNREADABLE',
    path: option,
    subject: printable(path),
    value,
    problem,
    allowed: 'a place where files can be written',
  } as const;
  return new Refusal(exitCode.failed, [complaint]);
}
