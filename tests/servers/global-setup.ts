import { once } from 'node:events';
import { rmSync } from 'node:fs';
import { createServer, type RequestListener } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { TestProject } from 'vitest/node';
import { makeEmbeddedTemplate } from './embedded.js';
import { removeStaleFolders } from './folders.js';
import { makePostgresTemplate, type PostgresServer, startPostgresFrom } from './postgres.js';

/**
 * What all test files of a run share, made when the first of them asks: the files of a new
 * PostgreSQL server and of a new embedded database, and one such server. They ask over HTTP, for each file has a process of its own;
 * a run that touches neither starts neither.
 */

declare module 'vitest' {
  interface ProvidedContext {
    /** Where test files ask for what they share. */
    readonly sharedServers: string;
  }
}

export async function setup(project: TestProject): Promise<() => Promise<void>> {
  removeStaleFolders();
  let template: Promise<string> | undefined;
  let postgres: Promise<PostgresServer> | undefined;
  let embedded: Promise<string> | undefined;
  const shared: Readonly<Record<string, () => Promise<string>>> = {
    '/embedded-template': () => {
      embedded ??= makeEmbeddedTemplate();
      return embedded;
    },
    '/postgres-template': () => {
      template ??= makePostgresTemplate();
      return template;
    },
    '/postgres': async () => {
      postgres ??= shared['/postgres-template']?.().then(startPostgresFrom);
      return (await postgres)?.url ?? '';
    },
  };
  const answer: RequestListener = (request, response) => {
    const make = shared[request.url ?? ''];
    if (!make) {
      response.writeHead(404).end(`nothing is shared at ${request.url}`);
      return;
    }
    make().then(
      (text) => response.end(text),
      (error: Error) => response.writeHead(500).end(error.stack),
    );
  };
  const server = createServer(answer).listen(0, '127.0.0.1');
  await once(server, 'listening');
  const { port } = server.address() as AddressInfo;
  project.provide('sharedServers', `http://127.0.0.1:${port}`);
  return async () => {
    server.closeAllConnections();
    server.close();
    await (await postgres?.catch(() => undefined))?.stop();
    for (const made of [template, embedded]) {
      const folder = await made?.catch(() => undefined);
      if (folder !== undefined) rmSync(folder, { recursive: true, force: true });
    }
  };
}
