import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { z } from 'zod';
import { build, heddle } from './built-program.js';
import { checkout } from './scratch.js';

const read = (path: string): string => readFileSync(join(checkout, path), 'utf8');

/** What we say of a service; what is not listed here may be said as well. */
const serviceSchema = z.looseObject({
  image: z.string(),
  build: z.object({ context: z.literal('.'), dockerfile_inline: z.string() }).optional(),
  command: z.array(z.string()).optional(),
  environment: z.record(z.string(), z.string()).default({}),
  secrets: z.array(z.string()).default([]),
  ports: z.array(z.string()).default([]),
  volumes: z.array(z.string()).default([]),
  networks: z.array(z.string()),
  depends_on: z
    .record(z.string(), z.object({ condition: z.literal('service_healthy') }))
    .default({}),
  healthcheck: z
    .object({ test: z.array(z.string()) })
    .loose()
    .optional(),
  restart: z.string(),
  deploy: z.looseObject({
    resources: z.object({ limits: z.object({ cpus: z.string(), memory: z.string() }) }),
  }),
});
const composeSchema = z.looseObject({
  services: z.record(z.string(), serviceSchema),
  secrets: z.record(z.string(), z.object({ file: z.string() })),
  networks: z.record(z.string(), z.object({ internal: z.boolean() }).partial().nullable()),
  volumes: z.record(z.string(), z.null()),
});

const compose = composeSchema.parse(parse(read('docker-compose.yml'), { merge: true }));
const services = Object.entries(compose.services);
const serviceOf = (name: string): z.output<typeof serviceSchema> => {
  const service = compose.services[name];
  if (service === undefined) throw new Error(`no service ${name}`);
  return service;
};
const ours = ['api', 'worker'] as const;
const dockerfile = serviceOf('api').build?.dockerfile_inline ?? '';

describe('the services of one server', () => {
  it('are records, queue, API and workers', () => {
    expect(Object.keys(compose.services).toSorted()).toEqual([
      'api',
      'postgres',
      'redis',
      'worker',
    ]);
  });

  it.each(services)('%s comes from an image of a stated version', (_, { image }) => {
    expect(image).toMatch(/^(postgres:17|redis:7)[\w.-]*$|^heddle:local$/);
  });

  it.each(services)('%s can be reached from this machine alone', (_, { ports }) => {
    expect(ports.filter((port) => !port.startsWith('127.0.0.1:'))).toEqual([]);
  });

  it.each(services)('%s has no rights over the machine', (_, service) => {
    const rights = [
      'privileged',
      'cap_add',
      'devices',
      'pid',
      'ipc',
      'network_mode',
      'userns_mode',
    ];
    expect(Object.keys(service).filter((key) => rights.includes(key))).toEqual([]);
    expect(service['security_opt']).toEqual(['no-new-privileges:true']);
    const volumes = service.volumes.map((volume) => volume.split(':')[0] ?? '');
    expect(volumes.filter((volume) => !(volume in compose.volumes))).toEqual([]);
  });

  it.each(services)('%s is started again when it dies, and has its limits', (_, service) => {
    expect(service.restart).toBe('unless-stopped');
    const { cpus, memory } = service.deploy.resources.limits;
    expect([cpus, memory]).toEqual([
      expect.stringMatching(/^(\d+|\$\{\w+:-\d+\})$/),
      expect.stringMatching(/^(\d+[mg]|\$\{\w+:-\d+g\})$/),
    ]);
    expect(service['stop_grace_period']).toMatch(/^\d+s$/);
  });

  it.each(['postgres', 'redis', 'api'])('%s tells whether it is well', (name) => {
    expect(serviceOf(name).healthcheck?.test[0]).toMatch(/^CMD/);
  });

  it('wait for those they need', () => {
    expect(Object.keys(serviceOf('api').depends_on)).toEqual(['postgres', 'redis']);
    expect(Object.keys(serviceOf('worker').depends_on)).toEqual(['api']);
    for (const [, { depends_on }] of services) {
      const needed = Object.keys(depends_on);
      expect(needed.filter((name) => serviceOf(name).healthcheck === undefined)).toEqual([]);
    }
  });

  it('keep records and queue on volumes, in a network without a way out', () => {
    for (const name of ['postgres', 'redis']) {
      expect(serviceOf(name).volumes).toHaveLength(1);
      expect(serviceOf(name).networks).toEqual(['inside']);
    }
    expect(compose.networks['inside']?.internal).toBe(true);
  });

  it('run a queue that forgets nothing', () => {
    const command = serviceOf('redis').command?.join(' ');
    expect(command).toContain('--appendonly yes');
    expect(command).toContain('--maxmemory-policy noeviction');
  });
});

describe('secrets', () => {
  it('are files that are neither committed nor built into an image', () => {
    const files = Object.values(compose.secrets).map(({ file }) => file);
    expect(files.filter((file) => !file.startsWith('./secrets/'))).toEqual([]);
    expect(read('.gitignore').split('\n')).toContain('/secrets/');
    const [first, ...kept] = read('.dockerignore')
      .split('\n')
      .filter((line) => /^[^#]/.test(line));
    expect(first).toBe('*');
    expect(kept.filter((line) => !line.startsWith('!') || /secrets/.test(line))).toEqual([]);
  });

  it.each(services)('of %s are read from where they are put', (_, { environment, secrets }) => {
    const named = Object.entries(environment)
      .filter(([name]) => name.endsWith('_FILE'))
      .map(([, path]) => path);
    expect(named).toEqual(secrets.map((secret) => `/run/secrets/${secret}`));
    expect(secrets.filter((secret) => !(secret in compose.secrets))).toEqual([]);
    const written = Object.values(environment).filter((value) => /:\/\/[^/]*:[^/]*@/.test(value));
    expect(written).toEqual([]);
  });
});

describe('the image of Heddle', () => {
  it('is built from this checkout, on a Node that the program runs on', () => {
    const bases = [...dockerfile.matchAll(/^FROM (\S+)/gm)].map(([, base]) => base);
    expect(bases).toEqual(['node:20-bookworm-slim', 'node:20-bookworm-slim']);
    expect(JSON.parse(read('package.json')).engines.node).toMatch(/^>=20\./);
  });

  it('copies what exists and is not ignored', () => {
    const copied = [...dockerfile.matchAll(/^COPY (?!--from)(.+) \.\/?$/gm)].flatMap(([, paths]) =>
      (paths ?? '').split(' ').filter((path) => path !== '.'),
    );
    const kept = read('.dockerignore')
      .split('\n')
      .filter((line) => line.startsWith('!'))
      .map((line) => line.slice(1));
    expect(copied.length).toBeGreaterThan(0);
    expect(copied.filter((path) => !kept.includes(path))).toEqual([]);
    expect(kept.filter((path) => !existsSync(join(checkout, path)))).toEqual([]);
  });

  it('runs as an ordinary user who can change nothing in it', () => {
    expect(/^USER (\S+)$/m.exec(dockerfile)?.[1]).toBe('node');
    for (const name of ours) {
      const service = serviceOf(name);
      expect([service['read_only'], service['cap_drop'], service['init']]).toEqual([
        true,
        ['ALL'],
        true,
      ]);
    }
  });

  it('is the same for API and workers, built once', () => {
    expect(serviceOf('worker').image).toBe(serviceOf('api').image);
    expect(serviceOf('worker').build).toBeUndefined();
  });
});

describe('the program', () => {
  beforeAll(() => build());

  it('starts as the image says', () => {
    const entry = /^ENTRYPOINT (.+)$/m.exec(dockerfile)?.[1] ?? '';
    const { bin } = JSON.parse(read('package.json'));
    expect(JSON.parse(entry)).toEqual(['node', bin.heddle]);
  });

  it.each(ours)('knows the command, the options and the variables of %s', async (name) => {
    const { command = [], environment } = serviceOf(name);
    const [subcommand = '', ...options] = command;
    const { code, stdout } = await heddle([subcommand, '--help']);
    expect(code).toBe(0);
    expect(stdout).toContain(`heddle ${subcommand}`);
    const said = new Set(stdout.match(/--[a-z-]+|\b[A-Z]+(_[A-Z]+)+\b/g));
    const meant = [...options.filter((word) => word.startsWith('--')), ...Object.keys(environment)];
    expect(meant.filter((word) => !said.has(word))).toEqual([]);
  });

  it('is given longer to stop than its worker takes to finish tasks', async () => {
    const { stdout } = await heddle(['worker', '--help']);
    const drain = Number(/--drain[^(]*\(default:\s+(\d+)/.exec(stdout)?.[1]);
    const grace = Number(/^(\d+)s$/.exec(String(serviceOf('worker')['stop_grace_period']))?.[1]);
    expect(grace).toBeGreaterThan(drain);
  });

  it('is asked for its health where it serves', () => {
    const { command, healthcheck } = serviceOf('api');
    expect(command?.slice(-2)).toEqual(['--port', '8080']);
    expect(healthcheck?.test.at(-1)).toContain('http://127.0.0.1:8080/readyz');
    expect(serviceOf('api').ports).toEqual([expect.stringMatching(/:8080$/)]);
  });
});
