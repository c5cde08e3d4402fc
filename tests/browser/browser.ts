import { readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { gzipSync } from 'node:zlib';
import { type Browser, type BrowserContextOptions, chromium, type Page } from 'playwright-core';
import { findProgram } from '../../src/bootstrap/programs.mjs';

const switches = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

export const openBrowser = (): Promise<Browser> =>
  chromium.launch({ executablePath: findProgram('chromium') ?? '', args: switches });

/** A page that writes down what no visit may cause. */
export interface WatchedPage {
  readonly page: Page;
  /** Requests that left the server, errors of scripts, words on the console, breaches of policy. */
  readonly complaints: string[];
}

/** What the browser itself says of an answer below 500; the page shows it in its own words. */
const refusedAnswer = /^Failed to load resource: the server responded with a status of 4\d\d/;

/** @param origin  the only server that may be asked */
export async function openPage(
  browser: Browser,
  origin: string,
  options: BrowserContextOptions = {},
): Promise<WatchedPage> {
  const complaints: string[] = [];
  const context = await browser.newContext({ viewport: { width: 1280, height: 900 }, ...options });
  const page = await context.newPage();
  page.setDefaultTimeout(30_000);
  page.on('request', (request) => {
    if (!request.url().startsWith(`${origin}/`)) complaints.push(`request to ${request.url()}`);
  });
  page.on('pageerror', (error) => complaints.push(`error: ${error.message}`));
  page.on('console', (message) => {
    const isTold = ['error', 'warning'].includes(message.type());
    if (isTold && !refusedAnswer.test(message.text())) complaints.push(message.text());
  });
  await page.addInitScript(
    "addEventListener('securitypolicyviolation', (e) => console.error(e.violatedDirective, e.blockedURI))",
  );
  return { page, complaints };
}

/** Bytes of all files of the built page, packed as a server would send them. */
export function packedPageBytes(): number {
  const folder = fileURLToPath(new URL('../../dist/web/', import.meta.url));
  return readdirSync(folder, { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => gzipSync(readFileSync(`${entry.parentPath}/${entry.name}`)).length)
    .reduce((sum, bytes) => sum + bytes, 0);
}
