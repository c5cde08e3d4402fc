import { PGlite } from '@electric-sql/pglite';
import { makeServerFolder } from './folders.js';

/** Makes the files of an embedded database in which nothing is recorded yet, to be copied. */
export async function makeEmbeddedTemplate(): Promise<string> {
  const folder = makeServerFolder();
  const database = await PGlite.create({ dataDir: folder });
  await database.close();
  return folder;
}
