import { chownSync, existsSync, mkdtempSync, readdirSync, readFileSync, rmSync } from 'node:fs';
import { hostname, tmpdir } from 'node:os';
import { join } from 'node:path';

/** Folders of this machine's test servers: the name tells the process they belong to. */
const prefix = `heddle-server-${hostname().replaceAll(/[^\w.]/g, '_')}-`;

/** This process's own, removed at its end where their servers did not come to it. */
const mine: string[] = [];

/** A new folder under the system's folder of temporary files, named for this process. */
export function makeServerFolder(user?: { readonly uid: number; readonly gid: number }): string {
  const folder = mkdtempSync(join(tmpdir(), `${prefix}${process.pid}-`));
  if (mine.push(folder) === 1) process.on('exit', () => mine.forEach(remove));
  if (user) chownSync(folder, user.uid, user.gid);
  return folder;
}

/** Removes what processes left behind that are gone and could not clean up. */
export function removeStaleFolders(): void {
  for (const name of readdirSync(tmpdir()).filter((other) => other.startsWith(prefix))) {
    const owner = Number(name.slice(prefix.length).split('-')[0]);
    if (!isAlive(owner)) remove(join(tmpdir(), name));
  }
}

function remove(folder: string): void {
  try {
    rmSync(folder, { recursive: true, force: true });
  } catch {
    // Another user's, or just being removed by its keeper: not ours to worry about.
  }
}

/** Whether a process of this id runs, whoever owns it; one that only waits to be buried does not. */
export function isAlive(pid: number): boolean {
  try {
    process.kill(pid, 0);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code !== 'EPERM') return false;
  }
  try {
    return !/^State:\s+[ZX]/m.test(readFileSync(`/proc/${pid}/status`, 'utf8'));
  } catch {
    // Gone since, or a system that does not tell.
    return !existsSync('/proc/self/status');
  }
}
