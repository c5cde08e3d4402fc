import { AxeBuilder } from '@axe-core/playwright';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { untilTrue } from '../servers/waiting.js';
import { openBrowser, openPage, packedPageBytes, type WatchedPage } from './browser.js';
import { type FixtureServer, startFixtureServer } from './fixture-server.js';
import { impossibleHeater, outcomeOf, twinHeater } from './twin-heater.js';

let server: FixtureServer;
let browser: Browser;
let watched: WatchedPage;
let held: Held;

/** What the server holds: jobs by their state, and a change that is approved. */
interface Held {
  readonly done: string;
  readonly infeasible: string;
  readonly failed: string;
  readonly cancelled: string;
  readonly running: string;
  readonly waiting: string;
  readonly change: string;
}

beforeAll(async () => {
  [server, browser] = await Promise.all([startFixtureServer(), openBrowser()]);
  held = await fill(server);
  watched = await openPage(browser, server.url);
});

afterAll(async () => {
  await browser?.close();
  await server?.stop();
});

async function fill({ service, submit }: FixtureServer): Promise<Held> {
  const solved = async (job: ReturnType<typeof twinHeater>): Promise<string> => {
    const id = await submit(job);
    service.finish(id, await outcomeOf(job));
    return id;
  };
  const [done, infeasible] = [await solved(twinHeater()), await solved(impossibleHeater())];
  const [failed, cancelled] = [await submit(twinHeater()), await submit(twinHeater())];
  const [running, waiting] = [await submit(twinHeater()), await submit(twinHeater())];
  service.alter(failed, {
    state: 'failed',
    failure: { code: 'STRUCTURE_UNSUPPORTED', message: 'a structure nobody has met before' },
  });
  await service.cancel(cancelled, {});
  service.start(running);
  const proposal = { person: 'Shift engineer', reason: 'calm' };
  const { id: change } = await service.propose(done, { alternative: 'A01', ...proposal });
  await service.approve(change, { person: 'Area lead', reason: 'reviewed' });
  await service.propose(done, { alternative: 'A02', ...proposal });
  return { done, infeasible, failed, cancelled, running, waiting, change };
}

/** One view: its address after `#`, and what is there once it has come. */
interface View {
  readonly name: string;
  readonly address: () => string;
  readonly shows: string;
  /** What a reader does there before it is judged. */
  readonly use?: (page: Page) => Promise<void>;
}

const alternative: View = {
  name: 'alternative',
  address: () => `jobs/${held.done}/A03`,
  shows: '.upset-table',
};

const views: readonly View[] = [
  alternative,
  {
    name: 'alternatives side by side',
    address: () => `jobs/${held.done}/A03?beside=A01,B01`,
    shows: '.upset-table',
    use: filter,
  },
  {
    name: 'settings of one’s own',
    address: () => `jobs/${held.done}/A02`,
    shows: '.front canvas',
    use: tryOwn,
  },
  { name: 'job run again', address: () => `jobs/${held.done}`, shows: '.change', use: runAgain },
  { name: 'list of jobs', address: () => '', shows: 'table.jobs' },
  { name: 'refused document', address: () => 'hand-in', shows: 'form', use: refuse },
  { name: 'waiting job', address: () => `jobs/${held.waiting}`, shows: '[role=status]' },
  {
    name: 'running job',
    address: () => `jobs/${held.running}`,
    shows: 'progress',
    use: openCancel,
  },
  { name: 'failed job', address: () => `jobs/${held.failed}`, shows: '.notice' },
  { name: 'cancelled job', address: () => `jobs/${held.cancelled}`, shows: '.notice' },
  { name: 'infeasible job', address: () => `jobs/${held.infeasible}`, shows: '.front canvas' },
  { name: 'front', address: () => `jobs/${held.done}`, shows: '.change' },
  { name: 'unknown alternative', address: () => `jobs/${held.done}/A77`, shows: '.notice-bad' },
  { name: 'sheet', address: () => `jobs/${held.done}/changes/${held.change}`, shows: '.sheet' },
  { name: 'unknown job', address: () => 'jobs/J000000000999', shows: '.notice-bad' },
  { name: 'unknown view', address: () => 'nowhere', shows: 'h1' },
];

async function refuse(page: Page): Promise<void> {
  await page
    .getByLabel('Or the document as text')
    .fill('{ "format": "heddle-job/1", "colour": 1 }');
  await page.getByRole('button', { name: 'Hand in' }).click();
  await page.locator('table.faults').waitFor();
}

async function filter(page: Page): Promise<void> {
  await page.getByLabel('Filter by').selectOption('robustness');
  await page.getByRole('slider', { name: 'Ms, worst' }).press('Home');
  await page.locator('.front-table tr.dimmed').first().waitFor();
}

async function tryOwn(page: Page): Promise<void> {
  const start = page.getByRole('button', { name: /^(Try settings|Start anew)$/ });
  await start.click();
  await page.getByRole('spinbutton', { name: 'TC-1 gain' }).fill('3');
  await page.getByText(/limits? broken:/).waitFor();
  await page.getByRole('spinbutton', { name: 'TC-2 integral' }).fill('-1');
  await page.locator('.fault').waitFor();
}

async function runAgain(page: Page): Promise<void> {
  await page.getByRole('button', { name: 'Run again with changes' }).click();
  await page.locator('.again').waitFor();
}

async function openCancel(page: Page): Promise<void> {
  await page.getByRole('button', { name: 'Cancel this job' }).click();
}

async function visit(page: Page, { address, shows, use }: View): Promise<void> {
  await page.emulateMedia({ colorScheme: 'light' });
  await page.setViewportSize({ width: 1280, height: 900 });
  // Straight from one view to another, the first would still stand there for a moment.
  await page.goto('about:blank');
  await page.goto(`${server.url}/#/${address()}`);
  await page.locator(shows).first().waitFor();
  await use?.(page);
}

/** Rules of accessibility that the page breaks, each with the first place where it does. */
async function barriers(page: Page, rules?: string[]): Promise<string[]> {
  const axe = new AxeBuilder({ page }).setLegacyMode();
  if (rules !== undefined) axe.withRules(rules);
  const { violations } = await axe.analyze();
  return violations.map(({ id, nodes }) => `${id}: ${nodes[0]?.html}`);
}

describe('every view of the page', () => {
  const named = views.map((view) => [view.name, view] as const);

  it.each(named)(
    '%s: is open to all readers, in light, in dark and at 820 pixels',
    async (_, view) => {
      const { page } = watched;
      await visit(page, view);
      expect(await barriers(page)).toEqual([]);
      const levels = await page.evaluate<number[]>(
        "[...document.querySelectorAll('h1, h2, h3, h4')].map((h) => Number(h.localName[1]))",
      );
      expect(levels[0]).toBe(1);
      expect(levels.filter((level) => level === 1)).toEqual([1]);
      expect(levels.filter((level, k) => level > (levels[k - 1] ?? 0) + 1)).toEqual([]);
      await page.emulateMedia({ colorScheme: 'dark' });
      // All else is the same in the dark.
      expect(await barriers(page, ['color-contrast', 'link-in-text-block'])).toEqual([]);
      await page.setViewportSize({ width: 820, height: 1100 });
      const beyond = await page.evaluate<number>(
        'document.documentElement.scrollWidth - innerWidth',
      );
      expect(beyond).toBeLessThanOrEqual(0);
    },
  );

  it('asks nobody but its server, breaks no policy and complains of nothing', () => {
    expect(watched.complaints).toEqual([]);
  });

  it('stands again after a reload, at the address it had', async () => {
    const { page } = watched;
    await visit(page, alternative);
    // Documents come one after the other; what is compared is what they add up to.
    await page.waitForLoadState('networkidle');
    const before = await page.locator('table.settings:not(.draft)').textContent();
    await page.reload();
    await page.locator(alternative.shows).waitFor();
    const settings = page.locator('table.settings:not(.draft)');
    await untilTrue(async () => (await settings.textContent()) === before, 'the same settings');
    const chosen = page.getByRole('radio', { name: 'A03' });
    await untilTrue(() => chosen.isChecked(), 'the same choice');
  });
});

describe('the built page', () => {
  it('is served under a policy that lets in nothing written into it and nobody else', async () => {
    const response = await fetch(server.url);
    const policy = response.headers.get('content-security-policy') ?? '';
    expect(policy).toContain("default-src 'none'");
    expect(policy).toContain("script-src 'self'");
    expect(policy).toContain("style-src 'self'");
    expect(policy).not.toContain('unsafe');
  });

  it('weighs less than 400 kB packed', () => {
    expect(packedPageBytes()).toBeLessThan(400_000);
  });
});
