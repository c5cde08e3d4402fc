import { existsSync } from 'node:fs';
import { basename, dirname } from 'node:path';
import { fileURLToPath } from 'node:url';
import fixed from '@fastify/static';
import type { FastifyInstance } from 'fastify';

const yearLong = 'public, max-age=31536000, immutable';

/**
 * Serves the built page, or says that there is none.
 *
 * Files whose name holds the hash of their content never change; all others are asked for anew.
 * @param folder  of the page; it ends in a slash
 */
export async function servePage(app: FastifyInstance, folder: URL | undefined): Promise<void> {
  if (folder === undefined || !existsSync(new URL('index.html', folder))) {
    app.get('/', { schema: { hide: true } }, (_request, reply) =>
      reply.type('text/plain; charset=utf-8').send(notBuilt),
    );
    return;
  }
  await app.register(fixed, {
    root: fileURLToPath(folder),
    wildcard: false,
    acceptRanges: false,
    cacheControl: false,
    setHeaders: (response, path) => {
      response.setHeader('cache-control', isHashed(path) ? yearLong : 'no-cache');
    },
  });
}

const isHashed = (path: string): boolean =>
  basename(dirname(path)) === 'assets' && /-[\w-]{8,}\.\w+$/.test(basename(path));

const notBuilt =
  'Heddle serves, but its page is not built; npm run build builds it.\n' +
  'The interface for programs is described at /api/openapi.json.\n';
