import { existsSync } from 'node:fs';
import { buildApi } from '../../src/api/index.js';
import type { JobInput } from '../../src/contract/index.js';
import { FixtureService } from './fixture-service.js';

/** The built page; `npm test` builds it first. */
const page = new URL('../../dist/web/', import.meta.url);

export interface FixtureServer {
  readonly url: string;
  readonly service: FixtureService;
  /** Hands in a job as the page would. */
  submit(job: JobInput): Promise<string>;
  stop(): Promise<void>;
}

/** The page behind Heddle's own HTTP interface, over a service in memory. */
export async function startFixtureServer(): Promise<FixtureServer> {
  if (!existsSync(page)) throw new Error('the page is not built: npm run build');
  const service = new FixtureService();
  const api = await buildApi({ service, page, times: { closing: 100 } });
  const url = await api.listen({ host: '127.0.0.1', port: 0 });
  return {
    url,
    service,
    submit: async (job) => {
      const { job: record } = await service.submit(new TextEncoder().encode(JSON.stringify(job)));
      return record.id;
    },
    stop: async () => api.close(),
  };
}
