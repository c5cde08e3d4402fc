import { once } from 'node:events';
import { type AddressInfo, connect, createServer, type Socket } from 'node:net';

/** A connection between a client and a server that a test can break. */
export interface Proxy {
  /** The target's URL with the proxy's address in place of its own. */
  readonly url: string;
  readonly port: number;
  /** Clients connected at this moment. */
  readonly connections: number;
  /** Breaks every connection and refuses new ones, as a dead server or a firewall would. */
  cut(): void;
  /** Keeps connections open but passes nothing, as a lost network would; new ones get no answer. */
  freeze(): void;
  /** Passes everything again; what waited in a freeze arrives. */
  heal(): void;
  stop(): Promise<void>;
}

/**
 * Starts a proxy on a free port of the loopback interface.
 * @param target  such as redis://127.0.0.1:6379 or postgres://heddle@127.0.0.1:5432/records
 */
export async function startProxy(target: string): Promise<Proxy> {
  const { hostname, port: targetPort } = new URL(target);
  const pairs = new Set<readonly [Socket, Socket]>();
  let state: 'healthy' | 'frozen' | 'cut' = 'healthy';

  const server = createServer((client) => {
    if (state === 'cut') {
      client.resetAndDestroy();
      return;
    }
    const upstream = connect(Number(targetPort), hostname);
    const pair = [client, upstream] as const;
    pairs.add(pair);
    join(client, upstream);
    join(upstream, client);
    if (state === 'frozen') part(pair);
    const end = (): void => {
      pairs.delete(pair);
      client.destroy();
      upstream.destroy();
    };
    for (const socket of pair) socket.on('error', end).on('close', end);
  }).listen(0, '127.0.0.1');
  await once(server, 'listening');

  const { port } = server.address() as AddressInfo;
  const url = new URL(target);
  url.hostname = '127.0.0.1';
  url.port = String(port);
  const cut = (): void => {
    state = 'cut';
    for (const [client, upstream] of pairs) {
      client.resetAndDestroy();
      upstream.destroy();
    }
  };
  return {
    url: url.href,
    port,
    get connections() {
      return pairs.size;
    },
    cut,
    freeze: () => {
      state = 'frozen';
      for (const pair of pairs) part(pair);
    },
    heal: () => {
      state = 'healthy';
      for (const [client, upstream] of pairs) {
        join(client, upstream);
        join(upstream, client);
      }
    },
    stop: async () => {
      cut();
      server.close();
      await once(server, 'close');
    },
  };
}

function join(from: Socket, to: Socket): void {
  from.unpipe(to);
  from.pipe(to);
}

function part([client, upstream]: readonly [Socket, Socket]): void {
  client.unpipe(upstream).pause();
  upstream.unpipe(client).pause();
}
