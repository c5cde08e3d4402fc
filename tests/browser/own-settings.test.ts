import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { StudyOutcome } from '../../src/study/index.js';
import { openBrowser, openPage } from './browser.js';
import { type FixtureServer, startFixtureServer } from './fixture-server.js';
import { press, tabTo } from './keyboard.js';
import { placeOfColour } from './pixels.js';
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

const field = (page: Page, name: string) => page.getByRole('spinbutton', { name });
const scored = (page: Page): Promise<void> => page.getByText('Scored.').waitFor();
const trials = (): unknown[] => server.service.judge.trials;

describe('settings of one’s own', () => {
  it('are scored while typed, kept under a name, compared and proposed', async () => {
    const { page, complaints, job } = await openDone('/A02');
    await page.getByRole('button', { name: 'Try settings' }).click();
    await scored(page);
    await page.getByText('These are the settings of A02, unchanged.').waitFor();
    await field(page, 'TC-1 gain').fill('0.9');
    await page.getByText('These are the settings of A02').waitFor({ state: 'detached' });
    await scored(page);
    expect(trials().at(-1)).toMatchObject({ 'TC-1': { gain: 0.9 } });
    // Its mark, in the colour of no other, is on both planes.
    await placeOfColour(page, '.trial canvas', '--own');
    await placeOfColour(page, '.front-plane canvas', '--own');

    const form = page.getByRole('form', { name: 'Keep these settings' });
    await form.getByRole('button', { name: 'Keep' }).click();
    await form.getByText('A name is needed').waitFor();
    await form.getByLabel('Name of these settings').fill('a little less');
    await form.getByLabel('Who keeps them').fill('Shift engineer');
    await form.getByRole('button', { name: 'Keep' }).click();
    await page.getByText('Kept as U01, a little less').waitFor();
    await page.waitForURL(`**/${job}/U01`);
    const row = page.getByRole('row', { name: /^U01/ });
    await row.getByText('a little less, kept by Shift engineer').waitFor();
    await page.locator('.loop-trends canvas').first().waitFor();
    expect(await page.locator('table.settings td.new').first().textContent()).toBe('0.9');
    await page.getByRole('checkbox', { name: 'Set A01 beside' }).check();
    await page.waitForURL(/U01\?beside=A01$/);

    const proposal = page.getByRole('form', { name: 'Propose U01' });
    await proposal.getByLabel('Your name').fill('Shift engineer');
    await proposal.getByLabel('Reason').fill('less valve travel');
    await proposal.getByRole('button', { name: 'Propose U01' }).click();
    await page.getByRole('form', { name: /^Decide on U01/ }).waitFor();
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('are nudged, taken back and kept by keyboard alone', async () => {
    const { page, complaints, job } = await openDone();
    await tabTo(page, 'Start from');
    await page.keyboard.type('today');
    await tabTo(page, 'Try settings');
    await press(page, 'Enter');
    await tabTo(page, 'TC-1 gain');
    await press(page, 'ArrowUp', 'ArrowUp', 'ArrowDown', 'PageUp');
    expect(await field(page, 'TC-1 gain').inputValue()).toBe('0.811');
    await scored(page);
    await page.keyboard.press('Shift+Tab');
    await page.keyboard.press('Shift+Tab');
    await page.keyboard.press('Shift+Tab');
    await press(page, 'Enter');
    expect(await field(page, 'TC-1 gain').inputValue()).toBe('0.8');
    await tabTo(page, 'TC-2 gain');
    await press(page, 'PageUp');
    expect(await field(page, 'TC-2 gain').inputValue()).toBe('150');
    await tabTo(page, 'Name of these settings');
    await page.keyboard.type('wider band');
    await tabTo(page, 'Who keeps them');
    await page.keyboard.type('Shift engineer');
    await press(page, 'Enter');
    await page.getByText('Kept as U01, wider band').waitFor();
    await page.waitForURL(`**/${job}/U01`);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('outlive a reload', async () => {
    const { page } = await openDone('/A01');
    await page.getByRole('button', { name: 'Try settings' }).click();
    await field(page, 'TC-2 integral').fill('0.0765');
    await page.reload();
    await scored(page);
    expect(await field(page, 'TC-2 integral').inputValue()).toBe('0.0765');
    await page.getByRole('button', { name: 'Put away' }).click();
    await page.reload();
    await page.getByRole('button', { name: 'Try settings' }).waitFor();
    await page.context().close();
  });

  it('say at its field what is wrong, and ask nothing of the server for it', async () => {
    const { page, complaints } = await openDone('/A01');
    await page.getByRole('button', { name: 'Try settings' }).click();
    await scored(page);
    const before = trials().length;
    await field(page, 'TC-1 integral').fill('-3');
    const described = async (name: string): Promise<string | null> => {
      const id = await field(page, name).getAttribute('aria-describedby');
      return page.locator(`[id="${id}"]`).textContent();
    };
    await page.locator('.fault').waitFor();
    expect(await described('TC-1 integral')).toContain('allowed');
    await field(page, 'TC-2 gain').fill('1,5');
    await page.locator('.fault').nth(1).waitFor();
    expect(await described('TC-2 gain')).toContain('such as 0.25');
    await page.getByText('Not scored: see the marked field').waitFor();
    expect(await page.getByRole('button', { name: 'Keep', exact: true }).isDisabled()).toBe(true);
    expect(trials().length).toBe(before);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('are called unstable where they are, and cannot be proposed then', async () => {
    const { page } = await openDone('/A01');
    await page.getByRole('button', { name: 'Try settings' }).click();
    await field(page, 'TC-1 gain').fill('60');
    await page.getByText('Unstable, on the nominal unit already').waitFor();
    const form = page.getByRole('form', { name: 'Keep these settings' });
    await form.getByLabel('Name of these settings').fill('too much');
    await form.getByLabel('Who keeps them').fill('Shift engineer');
    await form.getByRole('button', { name: 'Keep' }).click();
    await page.getByText('it cannot be proposed').waitFor();
    await page.getByRole('row', { name: /^U01.*unstable/ }).waitFor();
    expect(await page.getByRole('form', { name: /^Propose/ }).count()).toBe(0);
    await page.context().close();
  });

  it('name every limit that they break', async () => {
    const { page } = await openDone('/A01');
    await page.getByRole('button', { name: 'Try settings' }).click();
    await field(page, 'TC-1 gain').fill('3');
    await page.getByText(/limits? broken:/).waitFor();
    const broken = await page.locator('.trial .words').textContent();
    expect(broken).toContain('TC-1 gain margin');
    await page.context().close();
  });

  it('are asked for one at a time, the latest as soon as the one before is answered', async () => {
    const { page } = await openDone('/A01');
    await page.getByRole('button', { name: 'Try settings' }).click();
    await scored(page);
    const { judge } = server.service;
    judge.mostAtOnce = 0;
    const before = trials().length;
    let open: () => void = () => undefined;
    judge.gate = new Promise((resolve) => {
      open = resolve;
    });
    await field(page, 'TC-1 gain').fill('0.7');
    await expect.poll(() => trials().length).toBe(before + 1);
    for (const text of ['0.71', '0.72', '0.73']) await field(page, 'TC-1 gain').fill(text);
    await page.getByText('Scoring ...').waitFor();
    open();
    judge.gate = Promise.resolve();
    await scored(page);
    expect(trials().at(-1)).toMatchObject({ 'TC-1': { gain: 0.73 } });
    expect(judge.mostAtOnce).toBe(1);
    await page.context().close();
  });
});
