import { mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, test } from '@playwright/test';
import { writeMaster } from './masters.ts';
import { awake, expectAccessible, openAs, origin } from './people.ts';

test('a mix engineer adds masters, sees them measured and judged, reads a report and submits', async ({
  browser,
}) => {
  const folder = mkdtempSync(join(tmpdir(), 'plimsoll-masters-'));
  const loud = join(folder, 'tallow_201_mixst_v1.wav');
  const right = join(folder, 'tallow_202_mixst_v1.wav');
  writeMaster(loud, -19, 5);
  writeMaster(right, -23, 6);
  const { page, consoleErrors } = await openAs(browser, 'mix@copperkettle.example');
  await expect(page.getByRole('heading', { name: 'Deliverables' })).toBeVisible();
  await expectAccessible(page);

  await page.goto(`${origin()}/deliverables/add`);
  await awake(page);
  await expectAccessible(page);
  await page.locator('input[type="file"]').setInputFiles([loud, right]);
  const table = page.getByRole('table', { name: 'Files on their way' });
  await expect(table.getByRole('row')).toHaveCount(3);
  // A row can be picked once the server knows its file.
  await expect(page.getByRole('checkbox', { name: /^Pick tallow/ })).toHaveCount(2);
  await page.getByRole('checkbox', { name: 'Pick all' }).check();
  await page.getByRole('button', { name: /Set details of 2 picked/ }).click();
  const dialog = page.getByRole('dialog');
  await dialog.getByLabel('Programme').fill('The Tallow Road');
  await dialog.getByLabel('set the channels of all of them').check();
  await dialog.getByLabel('Harrow One').check();
  await dialog.getByRole('button', { name: 'Set', exact: true }).click();
  await expect(dialog).toBeHidden();

  const loudRow = table.getByRole('row', { name: /tallow_201/ });
  const rightRow = table.getByRole('row', { name: /tallow_202/ });
  await expect(loudRow.getByText('integrated 3.5 LU over')).toBeVisible({ timeout: 60_000 });
  await expect(rightRow.getByText(/integrated 0\.\d LU inside/)).toBeVisible({ timeout: 60_000 });
  await expectAccessible(page);

  await loudRow.getByRole('link').first().click();
  const rules = page.getByRole('table', { name: 'Rules' });
  await expect(rules.getByRole('row', { name: /Integrated loudness/ })).toContainText('−19.0');
  await expect(rules.getByRole('row', { name: /Integrated loudness/ })).toContainText('3.5 LU over');
  await expect(page.getByText(/national broadcast-loudness law prevail/)).toBeVisible();
  await expect(page.getByText(/monitors low/)).toBeVisible();
  await awake(page);
  await expect(page.locator('canvas')).toBeVisible();
  await expectAccessible(page);

  await page.goto(`${origin()}/deliverables?q=tallow_202`);
  await page.getByRole('link', { name: 'The Tallow Road' }).first().click();
  await page.getByRole('button', { name: 'Submit to Harrow One' }).click();
  await expect(page.getByRole('link', { name: 'Awaiting review at Harrow One' })).toBeVisible();
  expect(consoleErrors).toEqual([]);
});

test('a report reads without JavaScript, and a foreign organisation does not find it', async ({
  browser,
}) => {
  const plain = await browser.newContext({ javaScriptEnabled: false });
  const page = await plain.newPage();
  await page.goto(`${origin()}/sign-in`);
  await page.locator('#email').fill('mix@copperkettle.example');
  await page.locator('#password').fill('load-line-demo');
  await page.getByRole('button', { name: 'Sign in', exact: true }).click();
  await page.goto(`${origin()}/deliverables?q=tallow_201`);
  await page.getByRole('link', { name: 'The Tallow Road' }).first().click();
  await expect(page.getByRole('table', { name: 'Rules' })).toContainText('3.5 LU over');
  const address = page.url();
  const { page: other } = await openAs(browser, 'mix@tworooks.example');
  const answer = await other.goto(address);
  expect(answer?.status()).toBe(404);
});
