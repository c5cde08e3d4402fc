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

/** The job that the page shows, from its address. */
const jobOf = (page: Page): string => /#\/jobs\/(J\w+)/.exec(page.url())?.[1] ?? '';

/** What the page shows of the settings of TC-1 and TC-2, new numbers last. */
const newSettings = (page: Page): Promise<string[]> =>
  page.locator('table.settings td.new').allInnerTexts();

/** The same from the front itself. */
function settingsOf(id: string): string[] {
  const found = outcome.front.alternatives.find((alternative) => alternative.id === id);
  return ['TC-1', 'TC-2'].flatMap((tag) => {
    const settings = found?.settings[tag];
    return [String(settings?.gain), String(settings?.integral)];
  });
}

describe('the page', () => {
  it('leads by mouse from a document to a signed sheet', async () => {
    const { page, complaints } = await openPage(browser, server.url);
    await page.goto(server.url);
    await page.getByText('No job has been handed in yet').waitFor();
    await page.getByRole('link', { name: 'Hand in a job' }).click();
    const bytes = Buffer.from(JSON.stringify(twinHeater()));
    const file = { name: 'twin-heater.json', mimeType: 'application/json', buffer: bytes };
    await page.getByLabel('Job document, a file').setInputFiles(file);
    await page.getByRole('button', { name: 'Hand in' }).click();
    await page.getByText('waits for its turn').waitFor();

    // Each step arrives by the stream of events, without anything being asked for again.
    const job = jobOf(page);
    server.service.start(job);
    await page.getByText('stage 3 of 6: levels').waitFor();
    server.service.finish(job, outcome);
    const table = page.locator('table.front-table');
    await table.waitFor();
    const rows = outcome.front.alternatives.map(({ id }) => id);
    expect(await table.getByRole('radio', { name: /^A\d+$/ }).count()).toBe(rows.length);

    // A click on the mark furthest to the right chooses the fastest alternative.
    const plane = page.locator('.front-plane canvas');
    await plane.click({ position: await placeOfColour(page, '.front-plane canvas', '--weft') });
    const last = rows.at(-1) ?? '';
    await page.waitForURL(`**/${job}/${last}`);
    expect(await newSettings(page)).toEqual(settingsOf(last));
    await placeOfColour(page, '.front-plane canvas', '--chosen');

    await page.getByRole('row', { name: /^A02/ }).click();
    await page.waitForURL(`**/${job}/A02`);
    expect(await newSettings(page)).toEqual(settingsOf('A02'));
    await page.getByLabel('Upset').selectOption({ label: 'TC-2, setpoint step' });
    await page.getByText('A step of 2.00 degC in the setpoint of TC-2.').waitFor();
    await placeOfColour(page, '.loop-trends canvas', '--chosen');

    const proposal = page.getByRole('form', { name: 'Propose A02' });
    await proposal.getByLabel('Your name').fill('Shift engineer');
    await proposal.getByLabel('Reason').fill('calmer on feed changes');
    await proposal.getByRole('button', { name: 'Propose A02' }).click();
    const decision = page.getByRole('form', { name: /^Decide on A02/ });
    await decision.getByLabel('Your name').fill('Shift engineer');
    await decision.getByText('Approval is meant for a second person').waitFor();
    await decision.getByLabel('Your name').fill('Area lead');
    await decision.getByRole('button', { name: 'Approve' }).click();
    await decision.getByText('A reason is needed').waitFor();
    await decision.getByLabel('Reason').fill('reviewed with operations');
    await decision.getByRole('button', { name: 'Approve' }).click();
    await page.getByRole('link', { name: 'Change sheet' }).click();

    await page.getByRole('heading', { name: 'Change sheet, Twin heater' }).waitFor();
    expect(await page.locator('table.dial td.new').allInnerTexts()).toEqual(settingsOf('A02'));
    const facts = await page.locator('.sheet .facts').textContent();
    expect(facts).toContain('Area lead');
    expect(facts).toContain('reviewed with operations');
    const download = page.waitForEvent('download');
    await page.getByRole('link', { name: 'as CSV' }).click();
    expect((await download).suggestedFilename()).toMatch(/^heddle-change-C\w+\.csv$/);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('leads by keyboard alone from a document to a signed sheet', async () => {
    const { page, complaints } = await openPage(browser, server.url);
    await page.goto(`${server.url}/#/`);
    await press(page, 'Tab', 'Enter');
    await tabTo(page, 'Hand in a job');
    await press(page, 'Enter');
    await tabTo(page, 'Or the document as text');
    await page.keyboard.insertText(JSON.stringify(twinHeater()));
    await tabTo(page, 'Hand in', 'button');
    await press(page, 'Enter');
    await page.getByText('waits for its turn').waitFor();
    const job = jobOf(page);
    server.service.finish(job, outcome);
    await page.locator('table.front-table').waitFor();

    await tabTo(page, 'Alternatives along the front, from robust to fast');
    await press(page, 'ArrowRight', 'ArrowRight');
    await page.waitForURL(`**/${job}/A02`);
    await press(page, 'End');
    const last = outcome.front.alternatives.at(-1)?.id ?? '';
    await page.waitForURL(`**/${job}/${last}`);
    await press(page, 'Home');
    await page.waitForURL(`**/${job}/A01`);
    await tabTo(page, 'A01');
    await press(page, 'ArrowDown');
    await page.waitForURL(`**/${job}/A02`);
    await tabTo(page, 'More robust A01');
    await press(page, 'Enter');
    await page.waitForURL(`**/${job}/A01`);
    expect(await newSettings(page)).toEqual(settingsOf('A01'));

    await tabTo(page, 'Upset');
    await page.keyboard.type('TC-1, s');
    await page.getByText('in the setpoint of TC-1.').waitFor();
    await tabTo(page, 'Your name');
    await page.keyboard.type('Shift engineer');
    await tabTo(page, 'Reason');
    await page.keyboard.type('calmer on feed changes');
    await tabTo(page, 'Propose A01', 'button');
    await press(page, 'Enter');
    await page.getByRole('form', { name: /^Decide on A01/ }).waitFor();
    // Whoever signed stands at what was signed.
    await page.locator('.change h3:focus').waitFor();
    await tabTo(page, 'Your name');
    await page.keyboard.type('Area lead');
    await tabTo(page, 'Reason');
    await page.keyboard.type('reviewed');
    await tabTo(page, 'Approve', 'button');
    await press(page, 'Enter');
    await page.locator('.change h3:focus', { hasText: 'approved' }).waitFor();
    await tabTo(page, 'Change sheet');
    await press(page, 'Enter');
    await page.getByRole('heading', { name: 'Change sheet, Twin heater' }).waitFor();
    expect(await page.locator('table.dial td.new').allInnerTexts()).toEqual(settingsOf('A01'));
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('shows every fault of a refused document and takes the mended one', async () => {
    const { page, complaints } = await openPage(browser, server.url);
    await page.goto(`${server.url}/#/hand-in`);
    const faulty = JSON.stringify({ ...twinHeater(), loops: [], colour: 'red' });
    await page.getByLabel('Or the document as text').fill(faulty);
    await page.getByRole('button', { name: 'Hand in' }).click();
    await page.getByRole('heading', { name: 'Refused: 2 faults' }).waitFor();
    const rows = await page.locator('table.faults tbody tr').allInnerTexts();
    const unknown = rows.find((row) => row.startsWith('colour'));
    const list = rows.find((row) => row.startsWith('loops'));
    for (const words of ['KEY_UNKNOWN', '"red"', 'format, unit']) expect(unknown).toContain(words);
    for (const words of ['LIST_LENGTH', '1 to 64 entries']) expect(list).toContain(words);
    const warned = twinHeater();
    const [loop] = warned.loops;
    if (loop?.present !== undefined) loop.present.gain = -0.8;
    await page.getByLabel('Or the document as text').fill(JSON.stringify(warned));
    await page.getByRole('button', { name: 'Hand in' }).click();
    await page.getByRole('heading', { name: 'Accepted, with 1 warning' }).waitFor();
    await page.getByText('the controller acts against its response').waitFor();
    await page.getByRole('link', { name: 'Follow the job' }).click();
    await page.getByText('waits for its turn').waitFor();
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('hands a document in once, however often its answer is lost', async () => {
    const { page } = await openPage(browser, server.url);
    await page.goto(`${server.url}/#/hand-in`);
    await page.getByLabel('Or the document as text').fill(JSON.stringify(twinHeater()));
    const before = server.service.keys.length;
    // The server takes the document; its answer never arrives.
    await page.route('**/api/jobs', async (route) => {
      await route.fetch();
      await route.abort();
    });
    await page.getByRole('button', { name: 'Hand in' }).click();
    await page.getByText('The server does not answer').waitFor();
    await page.unroute('**/api/jobs');
    await page.getByRole('button', { name: 'Hand in' }).click();
    await page.getByText('waits for its turn').waitFor();
    expect(server.service.keys.length).toBe(before + 1);
    await page.context().close();
  });

  it('cancels a running job, and says who did and why', async () => {
    const id = await server.submit(twinHeater());
    server.service.start(id);
    const { page, complaints } = await openPage(browser, server.url);
    await page.goto(`${server.url}/#/jobs/${id}`);
    await page.getByRole('button', { name: 'Cancel this job' }).click();
    await page.getByLabel('Your name').fill('Shift engineer');
    await page.getByLabel('Reason').fill('wrong models');
    await page.getByRole('button', { name: 'Cancel the job' }).click();
    await page.getByRole('heading', { name: 'The job was cancelled' }).waitFor();
    const words = await page.locator('.notice').textContent();
    expect(words).toContain('Shift engineer');
    expect(words).toContain('wrong models');
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('rejects a proposal, and offers no sheet of it', async () => {
    const id = await server.submit(twinHeater());
    server.service.finish(id, outcome);
    await server.service.propose(id, {
      alternative: 'A01',
      person: 'Shift engineer',
      reason: 'calm',
    });
    const { page, complaints } = await openPage(browser, server.url);
    await page.goto(`${server.url}/#/jobs/${id}`);
    await page.getByLabel('Your name').fill('Area lead');
    await page.getByLabel('Reason').fill('feed is about to change');
    await page.getByRole('button', { name: 'Reject' }).click();
    const change = page.locator('.change', { hasText: 'feed is about to change' });
    await change.getByText('rejected', { exact: true }).waitFor();
    expect(await page.getByRole('link', { name: 'Change sheet' }).count()).toBe(0);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('says when the server is out of reach, and goes on when it is back', async () => {
    const { page } = await openPage(browser, server.url);
    await page.goto(server.url);
    await page.locator('table.jobs').waitFor();
    await page.context().setOffline(true);
    await page.getByText('The server does not answer').waitFor();
    // What was shown stays; it is only said to be no longer kept up.
    expect(await page.locator('table.jobs').count()).toBe(1);
    await page.context().setOffline(false);
    await page.getByText('The server does not answer').waitFor({ state: 'detached' });
    await page.context().close();
  });
});
