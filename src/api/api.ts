import { randomUUID } from 'node:crypto';
import { Socket } from 'node:net';
import helmet from '@fastify/helmet';
import {
  type FastifyInstance,
  type FastifyReply,
  type FastifyRequest,
  type FastifyServerOptions,
  fastify,
} from 'fastify';
import { serializerCompiler, type ZodTypeProvider } from 'fastify-type-provider-zod';
import { excerpt, mostDocumentBytes } from '../contract/index.js';
import { type Service, ServiceProblem } from '../service/index.js';
import { mostMessageBytes, readBodies, refuseFile, refusePacked } from './bodies.js';
import { announcesTooMuch, BrokenConnections, leaveBodyUnread } from './broken-connections.js';
import { changeRoutes } from './change-routes.js';
import { checkRoutes } from './check-routes.js';
import { describeRoutes, descriptionRoute } from './description.js';
import { eventRoute } from './event-route.js';
import { healthRoutes } from './health-routes.js';
import { jobRoutes } from './job-routes.js';
import { OpenRequests, stopping } from './open-requests.js';
import { ownSettingsRoutes } from './own-settings-routes.js';
import { servePage } from './page.js';
import { answerError } from './problem-answer.js';
import { refuseCrossSite, refuseForeignHost, refuseRepeated } from './request-guards.js';
import { judgePart } from './request-parts.js';
import { resultRoutes } from './result-routes.js';
import { RouteTable } from './route-table.js';
import { securityHeaders } from './security-headers.js';
import { sheetRoute } from './sheet-route.js';
import type { Skin } from './skin.js';
import { spreadsheetRoutes } from './spreadsheet-routes.js';

/** How long the server waits for others, in ms. */
export interface ApiTimes {
  /** For the head of a request. */
  readonly headers: number;
  /** For a whole request with its body. */
  readonly request: number;
  /** For a caller to take some of its answer. */
  readonly reading: number;
  /** Between signs of life on a stream of events. */
  readonly heartbeat: number;
  /** For connections to end by themselves once the server stops. */
  readonly closing: number;
}

const usualTimes: ApiTimes = {
  headers: 15_000,
  request: 30_000,
  reading: 30_000,
  heartbeat: 15_000,
  closing: 5_000,
};

export interface ApiOptions {
  readonly service: Service;
  /** Folder of the built page, ending in a slash; where it is not there, `/` says so. */
  readonly page?: URL;
  /** Names that the server is reached by, beside those of the loopback; without a port. */
  readonly allowedHosts?: readonly string[];
  readonly times?: Partial<ApiTimes>;
  /** Nothing is logged where this is left out. */
  readonly logger?: Exclude<FastifyServerOptions['logger'], undefined>;
}

/** The HTTP interface of a service: routes, their description, the page. Not listening yet. */
export async function buildApi(options: ApiOptions): Promise<FastifyInstance> {
  const times = { ...usualTimes, ...options.times };
  const connections = new BrokenConnections();
  const open = new OpenRequests();
  const app = fastify({
    ...serverOptions(times, connections),
    logger: options.logger ?? false,
  }).withTypeProvider<ZodTypeProvider>();
  app.setValidatorCompiler(judgePart);
  app.setSerializerCompiler(serializerCompiler);
  app.setErrorHandler(answerError);
  takeConnections(app, connections);
  await app.register(helmet, securityHeaders);
  const allowedHosts = (options.allowedHosts ?? []).map((name) => name.toLowerCase());
  guardRequests(app, open, allowedHosts);
  finishAnswers(app, open, Math.max(times.reading, 2 * times.heartbeat));
  endWithServer(app, open, times.closing);
  readBodies(app);
  await describeRoutes(app);
  const skin: Skin = { service: options.service, open, heartbeat: times.heartbeat };
  for (const add of routes) add(app, skin);
  descriptionRoute(app);
  await servePage(app, options.page);
  await app.ready();
  return app;
}

const routes = [
  checkRoutes,
  spreadsheetRoutes,
  jobRoutes,
  eventRoute,
  resultRoutes,
  ownSettingsRoutes,
  changeRoutes,
  sheetRoute,
  healthRoutes,
];

function serverOptions(times: ApiTimes, connections: BrokenConnections) {
  return {
    bodyLimit: mostMessageBytes,
    genReqId: () => randomUUID(),
    requestTimeout: times.request,
    // Requests that come while the server stops get a problem document, not the framework's words.
    return503OnClosing: false,
    frameworkErrors: answerEarly,
    clientErrorHandler: (error: NodeJS.ErrnoException, socket: Socket) =>
      connections.refuseBroken(error, socket),
    http: {
      headersTimeout: Math.min(times.headers, times.request),
      connectionsCheckingInterval: Math.min(1_000, Math.ceil(times.headers / 4)),
      // The guards say themselves what is wrong with a host.
      requireHostHeader: false,
    },
  };
}

/** Answers what fails before any route or guard has seen it. */
function answerEarly(error: Error, request: FastifyRequest, reply: FastifyReply): void {
  reply.header('request-id', request.id).header('cache-control', 'no-store');
  reply.header('x-content-type-options', 'nosniff');
  answerError(error, request, reply);
}

/** Connections that do not simply carry a request. */
function takeConnections(app: FastifyInstance, connections: BrokenConnections): void {
  app.server.prependListener('request', (request, response) =>
    connections.watch(request, response),
  );
  app.server.on('checkContinue', (request, response) => {
    connections.watch(request, response);
    if (!announcesTooMuch(request, mostDocumentBytes)) response.writeContinue();
    app.routing(request, response);
  });
  app.server.on('checkExpectation', (request, response) => app.routing(request, response));
  app.server.on('connect', (_request, socket) => {
    const problem = new ServiceProblem('METHOD_NOT_ALLOWED', 'found CONNECT; this is no proxy');
    connections.refuse(problem, socket);
  });
}

/** Refuses what no route needs to see, before any of its body is read. */
function guardRequests(
  app: FastifyInstance,
  open: OpenRequests,
  allowedHosts: readonly string[],
): void {
  const table = new RouteTable();
  table.watch(app);
  app.addHook('onRequest', async (request, reply) => {
    reply.header('request-id', request.id);
    if (open.isClosing) throw stopping();
    refuseRepeated(request);
    refuseForeignHost(request, allowedHosts);
    refuseCrossSite(request, allowedHosts);
    table.refuseUnknown(request, reply);
    refusePacked(request);
    refuseFile(request);
  });
  app.setNotFoundHandler((request) => {
    throw new ServiceProblem('NOT_FOUND', `there is nothing at ${excerpt(request.url)}`);
  });
}

/** What every answer has: a word on keeping it, and an end where the caller does not take it. */
function finishAnswers(app: FastifyInstance, open: OpenRequests, readingTimeout: number): void {
  app.addHook('onSend', async (request, reply) => {
    const isFile = reply.hasHeader('last-modified');
    if (!isFile && !reply.hasHeader('cache-control')) reply.header('cache-control', 'no-store');
    if (open.isClosing) reply.header('connection', 'close');
    leaveBodyUnread(request, reply);
    if (reply.raw.socket instanceof Socket) reply.raw.socket.setTimeout(readingTimeout);
  });
}

/** Once the server stops, streams end at once, and connections that nobody ends are cut. */
function endWithServer(app: FastifyInstance, open: OpenRequests, closing: number): void {
  let cut: NodeJS.Timeout | undefined;
  app.addHook('preClose', async () => {
    open.close();
    cut = setTimeout(() => app.server.closeAllConnections(), closing).unref();
  });
  app.addHook('onClose', async () => clearTimeout(cut));
}
