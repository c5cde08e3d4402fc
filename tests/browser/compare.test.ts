import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { JobInput } from '../../src/contract/index.js';
import type { StudyOutcome } from '../../src/study/index.js';
import { openBrowser, openPage } from './browser.js';
import { type FixtureServer, startFixtureServer } from './fixture-server.js';
import { press, tabTo } from './keyboard.js';
import { outcomeOf, twinHeater } from './twin-heater.js';

let server: FixtureServer;
let browser: Browser;
let outcome: StudyOutcome;

beforeAll(async () => {
  [server, browser, outcome] = await Promise.all([
    startFixtureServer(),
    openBrowser(),
    outcomeOf(twinHeater()),
  ]);
});

afterAll(async () => {
  await browser?.close();
  await server?.stop();
});

/** A job that is done, on the page. */
async function openDone(at = '') {
  const job = await server.submit(twinHeater());
  server.service.finish(job, outcome);
  const { page, complaints } = await openPage(browser, server.url);
  await page.goto(`${server.url}/#/jobs/${job}${at}`);
  await page.locator('.front-table').waitFor();
  return { page, complaints, job };
}

describe('tuning sets side by side', () => {
  it('are set beside the chosen one by mouse, a published rule among them', async () => {
    const { page, complaints, job } = await openDone('/A01');
    const stable = outcome.front.baselines.find((rule) => rule.stable);
    const rule = stable?.method ?? '';
    await page.getByRole('checkbox', { name: 'Set A03 beside' }).check();
    await page.getByRole('checkbox', { name: `Set ${rule} beside` }).check();
    await page.waitForURL(`**/${job}/A01?beside=A03%2C${stable?.id}`);
    // A third would not be told apart.
    expect(await page.getByRole('checkbox', { name: 'Set A02 beside' }).isDisabled()).toBe(true);
    const heads = await page.locator('table.settings thead th.number').allInnerTexts();
    expect(heads).toEqual(['Today', 'A01', 'A03', rule]);
    const gains = await page
      .locator('table.settings tbody tr')
      .first()
      .locator('td.new')
      .allInnerTexts();
    const gainOf = (id: string): string | undefined =>
      [...outcome.front.alternatives, ...outcome.front.baselines]
        .find((one) => one.id === id)
        ?.settings['TC-1']?.gain.toString();
    expect(gains).toEqual(['A01', 'A03', stable?.id ?? ''].map(gainOf));
    await page.locator('.upset-table').waitFor();
    expect(await page.locator('.upset-table thead th.of-third').count()).toBe(4);
    await page.getByRole('button', { name: 'Take A03 away' }).click();
    await page.waitForURL(`**/${job}/A01?beside=${stable?.id}`);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('are set beside each other by keyboard, and stand so after a reload', async () => {
    const { page, complaints, job } = await openDone();
    await tabTo(page, 'Alternatives along the front, from robust to fast');
    await press(page, 'Home');
    await page.waitForURL(`**/${job}/A01`);
    await tabTo(page, 'Set A02 beside');
    await press(page, 'Space');
    await page.waitForURL(/beside=A02$/);
    await page.locator('.upset-table').waitFor();
    await tabTo(page, 'Upset');
    await page.keyboard.type('TC-2, s');
    await page.waitForURL(/beside=A02&upset=setpoint\+TC-2$/);
    await page.getByText('in the setpoint of TC-2.').waitFor();
    await page.reload();
    await page.getByText('in the setpoint of TC-2.').waitFor();
    expect(await page.getByRole('checkbox', { name: 'Set A02 beside' }).isChecked()).toBe(true);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('can be a published rule alone, which nobody can propose', async () => {
    const { page, complaints, job } = await openDone();
    const stable = outcome.front.baselines.find((rule) => rule.stable);
    await page.getByRole('row', { name: new RegExp(`^${stable?.method}`) }).click();
    await page.waitForURL(`**/${job}/${stable?.id}`);
    await page.getByText('a published rule, not verified').waitFor();
    await page.locator('.loop-trends canvas').first().waitFor();
    expect(await page.getByRole('form', { name: /^Propose/ }).count()).toBe(0);
    expect(complaints).toEqual([]);
    await page.context().close();
  });
});

describe('the limits of the chosen set', () => {
  it('are listed with the room left, assumed ones included, the tightest first', async () => {
    const { page } = await openDone('/A02');
    const rows = await page.locator('table.limits tbody tr').allInnerTexts();
    expect(rows.filter((row) => row.includes('output noise, assumed')).length).toBe(2);
    expect(rows.some((row) => row.includes('gain margin'))).toBe(true);
    const rooms = rows.map((row) => Number(/(\d+)\s%\s*$/.exec(row)?.[1]));
    expect(rooms).toEqual(rooms.toSorted((a, b) => a - b));
    await page.context().close();
  });
});

describe('the view of the front', () => {
  it('dims what a filter leaves out, and says how many pass', async () => {
    const { page, complaints } = await openDone();
    const count = outcome.front.alternatives.length;
    await page.getByLabel('Filter by').selectOption('robustness');
    const slider = page.getByRole('slider', { name: 'Ms, worst' });
    await page.getByText(`${count} of ${count} tunings pass`).waitFor();
    await slider.press('Home');
    // The slider's low end is below the least: nothing but the most robust can pass there.
    await page.getByText(/^[01] of \d+ tunings pass/).waitFor();
    expect(await page.locator('.front-table tr.dimmed').count()).toBeGreaterThanOrEqual(count - 1);
    await page.getByRole('button', { name: 'Remove the filter on Ms, worst' }).click();
    expect(await page.locator('.front-table tr.dimmed').count()).toBe(0);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('is spanned by any two figures', async () => {
    const { page, complaints } = await openDone('/A01');
    await tabTo(page, 'Across');
    await page.keyboard.type('TC-1 gain m');
    await page.getByLabel('Upward').selectOption('TC-2 travel');
    expect(await page.getByLabel('Across').inputValue()).toBe('TC-1 gainMargin');
    // The thread above a shuttle belongs to the speed alone.
    await page.getByText('The thread above a shuttle').waitFor({ state: 'detached' });
    expect(complaints).toEqual([]);
    await page.context().close();
  });
});

describe('a job run again', () => {
  it('takes other limits and another search, and remembers what it was made from', async () => {
    const { page, complaints, job } = await openDone();
    await page.getByRole('button', { name: 'Run again with changes' }).click();
    const form = page.getByRole('form', { name: 'Run again' });
    await form.getByLabel('TC-1 overshoot, new bound').fill('-4');
    await form.getByLabel('Another limit for').selectOption({ label: 'TC-2' });
    await form.getByLabel('on its').selectOption('peakSensitivity');
    await form.getByLabel('TC-2 peak sensitivity Ms, new bound').fill('1.7');
    await form.getByLabel('Alternatives, 2 to 100').fill('6');
    await form.getByRole('button', { name: 'Hand in the new job' }).click();
    await form.getByRole('heading', { name: 'Refused: 1 fault' }).waitFor();
    expect(await form.locator('.fault').count()).toBe(1);
    await form.getByLabel('TC-1 overshoot, new bound').fill('24');
    await form.getByRole('button', { name: 'Hand in the new job' }).click();
    await page.getByText('waits for its turn').waitFor();
    const made = /#\/jobs\/(J\w+)/.exec(page.url())?.[1] ?? '';
    expect(made).not.toBe(job);
    const bytes = await server.service.document(made);
    const document = JSON.parse(new TextDecoder().decode(bytes)) as JobInput;
    expect(document.loops.map(({ limits }) => limits)).toEqual([
      { overshoot: 24, gainMargin: 1.6 },
      { peakSensitivity: 1.7 },
    ]);
    expect(document.search).toMatchObject({ alternatives: 6, effort: 'quick', models: 2 });
    await page.getByRole('link', { name: 'Jobs', exact: true }).first().click();
    await page.getByRole('row', { name: new RegExp(`${made}, made from ${job}`) }).waitFor();
    await page.goBack();
    await page.getByRole('link', { name: job }).click();
    await page.waitForURL(`**/jobs/${job}`);
    await page.locator('.front-table').waitFor();
    expect(complaints).toEqual([]);
    await page.context().close();
  });
});
