/** What every browser test does: sign in as somebody of the demo, and hold the page to its promises. */
import AxeBuilder from '@axe-core/playwright';
import { expect, type Browser, type Page } from '@playwright/test';

export const origin = (): string => {
  const { E2E_ORIGIN } = process.env;
  if (!E2E_ORIGIN) throw new Error('The product did not say where it is open.');
  return E2E_ORIGIN;
};

/** A page of a browser of one's own; errors of its console are gathered. */
export async function openAs(
  browser: Browser,
  email: string,
): Promise<{ page: Page; consoleErrors: string[] }> {
  const page = await (await browser.newContext({ viewport: { width: 1440, height: 900 } })).newPage();
  const consoleErrors: string[] = [];
  page.on('console', (message) => message.type() === 'error' && consoleErrors.push(message.text()));
  page.on('pageerror', (error) => consoleErrors.push(error.message));
  await page.goto(`${origin()}/sign-in`);
  await page.locator('#email').fill(email);
  await page.locator('#password').fill('load-line-demo');
  await page.getByRole('button', { name: 'Sign in', exact: true }).click();
  await page.waitForURL((url) => !url.pathname.startsWith('/sign-in'));
  return { page, consoleErrors };
}

/** Waits until the page's islands answer to a person. */
export const awake = async (page: Page): Promise<void> => {
  await expect(page.locator('astro-island[ssr]:not([client="idle"])')).toHaveCount(0);
};

/** No violation of WCAG A and AA that axe finds. */
export async function expectAccessible(page: Page): Promise<void> {
  const { violations } = await new AxeBuilder({ page }).withTags(['wcag2a', 'wcag2aa']).analyze();
  expect(
    violations.map((one) => `${one.id}: ${one.nodes.map((node) => node.target.join(' ')).join('; ')}`),
  ).toEqual([]);
}
