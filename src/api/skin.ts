import type { IncomingMessage, ServerResponse } from 'node:http';
import type { FastifyBaseLogger, FastifyInstance, RawServerDefault } from 'fastify';
import type { ZodTypeProvider } from 'fastify-type-provider-zod';
import { z } from 'zod';
import { changeIdSchema, jobIdSchema, scoredNameSchema } from '../contract/index.js';
import type { Service } from '../service/index.js';
import type { OpenRequests } from './open-requests.js';

/** The server that routes are added to. */
export type Api = FastifyInstance<
  RawServerDefault,
  IncomingMessage,
  ServerResponse,
  FastifyBaseLogger,
  ZodTypeProvider
>;

/** What every route works with. */
export interface Skin {
  readonly service: Service;
  readonly open: OpenRequests;
  /** Between signs of life on a stream of events, in ms. */
  readonly heartbeat: number;
}

/** What paths name. */
export const jobPath = z.strictObject({ job: jobIdSchema });
export const changePath = z.strictObject({ change: changeIdSchema });
export const alternativePath = z.strictObject({ job: jobIdSchema, alternative: scoredNameSchema });
