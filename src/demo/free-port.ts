import { once } from 'node:events';
import { createServer } from 'node:net';

/** How many ports are tried, one after the other. */
const tries = 50;

/** The first port from one on that nothing on the loopback address listens on. */
export async function freePortFrom(first: number): Promise<number> {
  for (let port = first; port < first + tries; port += 1) {
    if (await isFree(port)) return port;
  }
  return 0;
}

async function isFree(port: number): Promise<boolean> {
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
