import type { FastifyInstance, FastifyReply, FastifyRequest } from 'fastify';
import { excerpt } from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';

interface KnownAddress {
  readonly shape: RegExp;
  readonly methods: Set<string>;
}

/** Which methods each address takes, to tell a wrong method from a wrong address. */
export class RouteTable {
  private readonly addresses = new Map<string, KnownAddress>();

  /** Learns of every route that is added from now on. */
  watch(app: FastifyInstance): void {
    app.addHook('onRoute', ({ url, method }) => {
      const address = this.addresses.get(url) ?? { shape: shapeOf(url), methods: new Set() };
      for (const one of [method].flat()) address.methods.add(one);
      this.addresses.set(url, address);
    });
  }

  /** @throws METHOD_NOT_ALLOWED, NOT_FOUND for a request that no route takes */
  refuseUnknown(request: FastifyRequest, reply: FastifyReply): void {
    if (!request.is404) return;
    const [path = ''] = request.url.split('?', 1);
    const methods = this.methodsOf(path);
    if (methods.length === 0) {
      throw new ServiceProblem('NOT_FOUND', `there is nothing at ${excerpt(path)}`);
    }
    const allowed = methods.join(', ');
    reply.header('allow', allowed);
    const detail = `found ${request.method}; allowed: ${allowed}`;
    throw new ServiceProblem('METHOD_NOT_ALLOWED', detail);
  }

  private methodsOf(path: string): readonly string[] {
    const known = [...this.addresses.values()].filter(({ shape }) => shape.test(path));
    return [...new Set(known.flatMap(({ methods }) => [...methods]))].sort();
  }
}

function shapeOf(url: string): RegExp {
  const parts = url
    .split('/')
    .map((part) => (part.startsWith(':') ? '[^/]+' : part.replace(/[.*+?^${}()|[\]\\]/g, '\\$&')));
  return new RegExp(`^${parts.join('/')}$`);
}
