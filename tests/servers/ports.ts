import { randomInt } from 'node:crypto';
import { once } from 'node:events';
import { createServer } from 'node:net';

/** Below the ports that systems give to outgoing connections, so that a restart finds its own free. */
const first = 20_000;
const count = 12_000;
const attempts = 100;

/** A port of the loopback interface on which nothing listens. */
export async function freePort(): Promise<number> {
  for (let attempt = 0; attempt < attempts; attempt++) {
    const port = first + randomInt(count);
    if (await canListen(port)) return port;
  }
  throw new Error(`no free port among ${attempts} tried from ${first} on`);
}

async function canListen(port: number): Promise<boolean> {
  const server = createServer();
  try {
    server.listen(port, '127.0.0.1');
    await once(server, 'listening');
    return true;
  } catch {
    return false;
  } finally {
    server.close();
  }
}
