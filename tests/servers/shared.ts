import { randomBytes } from 'node:crypto';
import { cpSync } from 'node:fs';
import { join } from 'node:path';
import { Client } from 'pg';
import { inject } from 'vitest';
import { type PostgresServer, startPostgresFrom } from './postgres.js';

/** Starts a PostgreSQL server of a test's own, to be killed and restarted at will. */
export async function startPostgres(): Promise<PostgresServer> {
  return startPostgresFrom(await askShared('/postgres-template'));
}

/**
 * Makes an empty database on the one server that all files of a run share, which nobody may kill;
 * it goes with the server at the end of the run.
 * @returns its URL
 */
export async function createDatabase(): Promise<string> {
  const url = new URL(await askShared('/postgres'));
  const name = `test_${randomBytes(8).toString('hex')}`;
  const client = new Client({ connectionString: url.href });
  await client.connect();
  try {
    await client.query(`create database ${name}`);
  } finally {
    await client.end();
  }
  url.pathname = name;
  return url.href;
}

/**
 * Puts an empty embedded database into a data folder: what a first start makes, which takes seconds of
 * a processor.
 */
export async function layOutDatabase(folder: string): Promise<void> {
  const template = await askShared('/embedded-template');
  cpSync(template, join(folder, 'database'), { recursive: true });
}

async function askShared(path: string): Promise<string> {
  const response = await fetch(`${inject('sharedServers')}${path}`);
  const text = await response.text();
  if (!response.ok) throw new Error(text);
  return text;
}
