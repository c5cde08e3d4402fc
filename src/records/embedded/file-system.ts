import { statfs } from 'node:fs/promises';
import { CodedError } from '../../base/index.js';

/**
 * File systems that live on another machine, by what statfs calls them: a lock there says nothing
 * about processes elsewhere.
 * @source Linux, include/uapi/linux/magic.h, and statfs(2)
 */
const networkFileSystems: ReadonlyMap<number, string> = new Map([
  [0x6969, 'NFS'],
  [0x517b, 'SMB'],
  [0xff534d42, 'CIFS'],
  [0xfe534d42, 'SMB2'],
  [0x5346414f, 'AFS'],
  [0x6b414653, 'AFS'],
  [0x00c36400, 'Ceph'],
  [0x0bd00bd0, 'Lustre'],
  [0x47504653, 'GPFS'],
  [0x7461636f, 'OCFS2'],
  [0x01161970, 'GFS2'],
]);

/** @throws {CodedError} FOLDER_UNSUITABLE where the folder lies on a network file system */
export async function refuseNetworkFolder(folder: string): Promise<void> {
  const { type } = await statfs(folder);
  const name = networkFileSystems.get(type);
  if (name === undefined) return;
  throw new CodedError(
    'FOLDER_UNSUITABLE',
    `the data folder ${folder} is on a network file system (${name}), where another machine could ` +
      'open it too; name a folder on a disk of this machine, or use a PostgreSQL server (DATABASE_URL)',
  );
}

/** Room left for this user where a folder is, bytes. */
export async function freeBytes(folder: string): Promise<number> {
  const { bavail, bsize } = await statfs(folder);
  return bavail * bsize;
}
