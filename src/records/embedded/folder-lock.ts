import { createHash, randomUUID } from 'node:crypto';
import { link, readFile, rename, rm, writeFile } from 'node:fs/promises';
import { hostname } from 'node:os';
import { CodedError } from '../../base/index.js';

/** Who holds a folder. A process id alone could have gone to another process since. */
interface Holder {
  readonly pid: number;
  /** When that process started, in clock ticks after boot; null where the system does not tell. */
  readonly started: string | null;
  /** Which boot of the machine; null where the system does not tell. */
  readonly boot: string | null;
  readonly host: string;
  /** Makes each holding different from any other. */
  readonly nonce: string;
}

/**
 * Takes a folder for this process alone, by an exclusive file that says who holds it.
 *
 * A file whose process is gone is taken over. Two that try to at once are kept apart by a claim of the
 * same kind on that very file: whoever has the claim looks again before it replaces the file.
 * @returns gives the folder back
 * @throws {CodedError} FOLDER_IN_USE naming the process that has it
 */
export async function lockFolder(path: string): Promise<() => Promise<void>> {
  const own = await ownIdentity();
  const text = `${JSON.stringify(own)}\n`;
  const draft = `${path}.${own.nonce}`;
  await writeFile(draft, text, { flag: 'wx' }).catch((error: unknown) => {
    throw unwritable(path, error);
  });
  try {
    await acquire(path, draft);
  } finally {
    await rm(draft, { force: true });
  }
  return async () => {
    // Only what is still ours is given back.
    if ((await contentOf(path)) === text) await rm(path, { force: true });
  };
}

/** Puts a finished file in its place: the content is there from the first moment. */
async function acquire(path: string, draft: string): Promise<void> {
  for (;;) {
    try {
      await link(draft, path);
      return;
    } catch (error) {
      if ((error as { code?: string }).code !== 'EEXIST') throw error;
    }
    const content = await contentOf(path);
    if (content === null) continue;
    const holder = holderOf(content);
    if (holder === null || (await isAlive(holder))) throw inUse(path, holder);
    const claim = `${path}.${createHash('sha256').update(content).digest('hex').slice(0, 16)}`;
    await acquire(claim, draft);
    try {
      if ((await contentOf(path)) !== content) continue;
      const copy = `${draft}.copy`;
      await link(draft, copy);
      await rename(copy, path);
      return;
    } finally {
      await rm(claim, { force: true });
    }
  }
}

const contentOf = (path: string): Promise<string | null> =>
  readFile(path, 'utf8').catch((error: { code?: string }) => {
    if (error.code === 'ENOENT') return null;
    throw error;
  });

function holderOf(content: string): Holder | null {
  try {
    const holder = JSON.parse(content) as Holder;
    return Number.isInteger(holder.pid) && holder.pid > 0 ? holder : null;
  } catch {
    return null;
  }
}

async function ownIdentity(): Promise<Holder> {
  return {
    pid: process.pid,
    started: await startOf(process.pid),
    boot: await bootOf(),
    host: hostname(),
    nonce: randomUUID(),
  };
}

/** False only where the holder is surely gone: another boot, no such process, or a later one. */
async function isAlive(holder: Holder): Promise<boolean> {
  const boot = await bootOf();
  if (boot !== null && holder.boot !== null && boot !== holder.boot) {
    // On this machine that is an earlier boot; on another one it says nothing.
    return holder.host !== hostname();
  }
  const started = await startOf(holder.pid);
  if (started !== null && holder.started !== null) return started === holder.started;
  try {
    process.kill(holder.pid, 0);
    return true;
  } catch (error) {
    return (error as { code?: string }).code !== 'ESRCH';
  }
}

/** @source proc(5), /proc/pid/stat: field 22 is the start time; the name in field 2 may hold blanks */
async function startOf(pid: number): Promise<string | null> {
  const stat = await readFile(`/proc/${pid}/stat`, 'utf8').catch(() => null);
  if (stat === null) return null;
  const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ');
  // A zombie holds nothing any more.
  return fields[0] === 'Z' ? 'ended' : (fields[19] ?? null);
}

const bootOf = (): Promise<string | null> =>
  readFile('/proc/sys/kernel/random/boot_id', 'utf8')
    .then((id) => id.trim())
    .catch(() => null);

function unwritable(path: string, cause: unknown): CodedError {
  const reason = (cause as { code?: string }).code ?? String(cause);
  const message = `nothing can be written to the data folder (${path}: ${reason}); name a folder that this user may write to (--data)`;
  return new CodedError('FOLDER_UNSUITABLE', message, { cause });
}

function inUse(path: string, holder: Holder | null): CodedError {
  const who =
    holder === null
      ? 'a file that this release cannot read'
      : `process ${holder.pid} on ${holder.host}`;
  return new CodedError(
    'FOLDER_IN_USE',
    `the data folder is in use: ${path} is held by ${who}; one process at a time may open it. ` +
      'Stop that process, or give this one a folder of its own (--data)',
  );
}
