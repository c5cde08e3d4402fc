import type { Page } from 'playwright-core';

/** How many stops to pass before giving up. */
const mostStops = 150;

/** What has the focus: its kind, and its name as a reader sees or hears it. */
const focused = `(() => {
  const at = document.activeElement;
  const name = at.getAttribute('aria-label') ?? at.labels?.[0]?.textContent ?? at.textContent;
  return { kind: at.localName, name: name.trim() };
})()`;

export async function press(page: Page, ...keys: readonly string[]): Promise<void> {
  for (const key of keys) await page.keyboard.press(key);
}

/** Goes on by the tabulator to what has that name. */
export async function tabTo(page: Page, name: string, kind?: string): Promise<void> {
  const passed: string[] = [];
  for (let stop = 0; stop < mostStops; stop += 1) {
    await page.keyboard.press('Tab');
    const at = await page.evaluate<{ kind: string; name: string }>(focused);
    if (at.name === name && (kind === undefined || at.kind === kind)) return;
    passed.push(at.name);
  }
  throw new Error(`the tabulator never came to ${name}; it passed ${passed.join(' | ')}`);
}
