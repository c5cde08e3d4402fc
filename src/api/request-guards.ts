import { isIP } from 'node:net';
import type { FastifyRequest } from 'fastify';
import { excerpt } from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';

/** Headers that mean something only once. */
const single = ['host', 'origin', 'content-type', 'idempotency-key', 'last-event-id'];

const hostShape = /^(?:\[[0-9a-f:.]+\]|[\w.-]+)(?::\d{1,5})?$/i;
const readOnly = ['GET', 'HEAD', 'OPTIONS', 'TRACE'];

/** @throws REQUEST_INVALID for a header given twice that may be given once */
export function refuseRepeated(request: FastifyRequest): void {
  const names = request.raw.rawHeaders
    .filter((_, index) => index % 2 === 0)
    .map((name) => name.toLowerCase());
  const twice = single.find((name) => names.indexOf(name) !== names.lastIndexOf(name));
  if (twice === undefined) return;
  throw new ServiceProblem('REQUEST_INVALID', `header ${twice}: given twice; allowed: once`);
}

/**
 * Refuses hosts that this server does not answer for: a page whose name is made to point at the
 * loopback address would otherwise be served as if it were ours.
 *
 * What arrives on the loopback address has to name it, or one of the allowed hosts. Elsewhere any host
 * is taken where none are listed, since only who runs the server knows its names.
 * @param allowedHosts  names without a port
 * @throws HOST_REFUSED, REQUEST_INVALID
 */
export function refuseForeignHost(request: FastifyRequest, allowedHosts: readonly string[]): void {
  const { host } = request.raw.headers;
  if (host === undefined) {
    if (request.raw.httpVersion === '1.0') return;
    throw new ServiceProblem(
      'REQUEST_INVALID',
      'header host: found nothing; allowed: the host asked',
    );
  }
  if (!hostShape.test(host)) {
    const detail = `header host: found ${excerpt(host)}; allowed: a name or address, and a port`;
    throw new ServiceProblem('REQUEST_INVALID', detail);
  }
  const name = bareName(host);
  if (isLoopbackName(name) || allowedHosts.includes(name)) return;
  if (!cameByLoopback(request) && (allowedHosts.length === 0 || isIP(name) !== 0)) return;
  const allowed = ['localhost', '127.0.0.1', '[::1]', ...allowedHosts].join(', ');
  throw new ServiceProblem('HOST_REFUSED', `found host ${excerpt(name)}; allowed: ${allowed}`);
}

/**
 * Refuses what a browser sends on behalf of another site's page, wherever it would change something.
 * Programs that are no browsers send neither header, and are let through.
 * @throws CROSS_SITE
 */
export function refuseCrossSite(request: FastifyRequest, allowedHosts: readonly string[]): void {
  if (readOnly.includes(request.method)) return;
  const { headers } = request.raw;
  const site = headers['sec-fetch-site'];
  if (site !== undefined && site !== 'same-origin' && site !== 'none') {
    const detail = `found Sec-Fetch-Site ${excerpt(site)}; allowed: same-origin, none`;
    throw new ServiceProblem('CROSS_SITE', detail);
  }
  const { origin, host = '' } = headers;
  if (origin === undefined || isOwnOrigin(origin, host, allowedHosts)) return;
  const detail = `found Origin ${excerpt(origin)}; allowed: that of this server, ${excerpt(host)}`;
  throw new ServiceProblem('CROSS_SITE', detail);
}

function isOwnOrigin(origin: string, host: string, allowedHosts: readonly string[]): boolean {
  if (!/^https?:\/\//.test(origin) || !URL.canParse(origin)) return false;
  const from = new URL(origin);
  if (allowedHosts.includes(from.hostname)) return true;
  const own = `${from.protocol}//${host}`;
  return URL.canParse(own) && new URL(own).host === from.host;
}

/** A host without its port and brackets, in small letters. */
function bareName(host: string): string {
  const name = host.toLowerCase().replace(/:\d+$/, '');
  return name.startsWith('[') ? name.slice(1, -1) : name.replace(/\.$/, '');
}

function isLoopbackName(name: string): boolean {
  return name === 'localhost' || name.endsWith('.localhost') || isLoopbackAddress(name);
}

function isLoopbackAddress(address: string): boolean {
  const plain = address.startsWith('::ffff:') ? address.slice(7) : address;
  return plain === '::1' || (isIP(plain) === 4 && plain.startsWith('127.'));
}

/** Connections without an address are those made inside the process. */
function cameByLoopback(request: FastifyRequest): boolean {
  const { localAddress } = request.raw.socket;
  return localAddress === undefined || isLoopbackAddress(localAddress);
}
