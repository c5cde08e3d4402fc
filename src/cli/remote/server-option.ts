import { InvalidArgumentError, type Option } from 'commander';
import { option } from '../options.js';

const usualServer = 'http://127.0.0.1:8080';

/** Which server a command speaks to. */
export function serverOption(): Option {
  return option('--server <url>', 'address of the Heddle server')
    .default(usualServer)
    .argParser((text) => {
      const isAddress = URL.canParse(text) && /^https?:$/.test(new URL(text).protocol);
      if (isAddress) return text;
      throw new InvalidArgumentError(`Allowed: an address such as ${usualServer}`);
    });
}

/** The address of something at a server, which may itself stand below a path. */
export function addressAt(server: string, path: string): URL {
  const base = new URL(server);
  base.search = '';
  base.hash = '';
  if (!base.pathname.endsWith('/')) base.pathname += '/';
  return new URL(path, base);
}

/** Where people see a job. */
export const jobPage = (server: string, id: string): string =>
  addressAt(server, `#/jobs/${id}`).href;
