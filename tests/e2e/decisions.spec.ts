import { expect, test, type Page } from '@playwright/test';
import { mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { writeMaster } from './masters.ts';
import { awake, expectAccessible, openAs, origin } from './people.ts';

/** Adds a master for a channel and waits until it is judged; its programme and episode come from the file's name. */
async function addMaster(
  page: Page,
  fileName: string,
  targetLufs: number,
  seed: number,
  channel = 'Harrow One',
): Promise<void> {
  const path = join(mkdtempSync(join(tmpdir(), 'plimsoll-masters-')), fileName);
  writeMaster(path, targetLufs, seed);
  await page.goto(`${origin()}/deliverables/add`);
  await awake(page);
  await page.locator('input[type="file"]').setInputFiles(path);
  await page.getByRole('checkbox', { name: `Pick ${fileName}` }).check();
  await page.getByRole('button', { name: /Set details of 1 picked/ }).click();
  const dialog = page.getByRole('dialog');
  await dialog.getByLabel('Programme').fill('The Tallow Road');
  await dialog.getByLabel(channel).check();
  await dialog.getByRole('button', { name: 'Set', exact: true }).click();
  await expect(dialog).toBeHidden();
  await expect(page.getByRole('row', { name: new RegExp(fileName) })).toContainText(/LU (inside|over)/, {
    timeout: 60_000,
  });
}

async function submit(page: Page, fileName: string): Promise<void> {
  await page.goto(`${origin()}/deliverables?q=${fileName}`);
  await page.getByRole('link', { name: 'The Tallow Road' }).first().click();
  await page.getByRole('button', { name: 'Submit to Harrow One' }).click();
  await expect(page.getByRole('link', { name: 'Awaiting review at Harrow One' })).toBeVisible();
}

test('a QC operator approves what passes and rejects what fails, and the supplier hears of it by mail', async ({
  browser,
  request,
}) => {
  const { page: engineer } = await openAs(browser, 'mix@copperkettle.example');
  await addMaster(engineer, 'tallow_301_mixst_v1.wav', -23, 11);
  await submit(engineer, 'tallow_301');
  await addMaster(engineer, 'tallow_302_mixst_v1.wav', -20, 12);
  await submit(engineer, 'tallow_302');

  const { page, consoleErrors } = await openAs(browser, 'qc@harrowsound.example');
  await page.goto(`${origin()}/review?q=tallow_30`);
  await awake(page);
  await expectAccessible(page);
  await page.getByRole('checkbox', { name: 'Pick all of this page' }).check();
  await page.getByRole('button', { name: /Approve 1 that passes/ }).click();
  await expect(page.getByRole('row', { name: /3\.01/ })).toHaveCount(0);
  const failing = page.getByRole('row', { name: /3\.02/ });
  await failing.click();
  await page.keyboard.press('r');
  const dialog = page.getByRole('dialog');
  await expectAccessible(page);
  await dialog.getByRole('textbox').first().fill('Three decibels over. Bring the whole mix down.');
  await dialog.getByRole('button', { name: 'Reject', exact: true }).click();
  await expect(failing).toHaveCount(0);
  expect(consoleErrors).toEqual([]);

  await engineer.goto(`${origin()}/review?q=tallow_302&state=rejected`);
  await expect(engineer.getByText('Rejected').first()).toBeVisible();
  const inbox = process.env.E2E_INBOX ?? '';
  await expect(async () => {
    const mails = await (await request.get(inbox)).text();
    expect(mails).toMatch(/mix@copperkettle\.example/);
    expect(mails).toMatch(/[Rr]ejected/);
    expect(mails).toMatch(/[Aa]pproved/);
  }).toPass({ timeout: 30_000 });
});

test('a spec owner publishes a version that changes a verdict, and nothing is measured again', async ({
  browser,
}) => {
  const { page: engineer } = await openAs(browser, 'mix@copperkettle.example');
  // A spec that no other test's masters are held to.
  await addMaster(engineer, 'tallow_401_mixst_v1.wav', -23.4, 21, 'Harrow Kids');
  const report = await engineer
    .getByRole('row', { name: /tallow_401/ })
    .getByRole('link')
    .first()
    .getAttribute('href');
  await engineer.goto(`${origin()}${report}`);
  const row = engineer
    .getByRole('table', { name: 'Rules' })
    .getByRole('row', { name: /Integrated loudness/ });
  await expect(row).toContainText('Pass');

  const { page, consoleErrors } = await openAs(browser, 'specs@harrowsound.example');
  await page.goto(`${origin()}/specs`);
  await awake(page);
  await expectAccessible(page);
  await page.getByRole('link', { name: 'Harrow Kids long form' }).click();
  await awake(page);
  await expectAccessible(page);
  await page.getByRole('link', { name: /draft|new version/i }).click();
  await awake(page);
  await expectAccessible(page);
  for (const label of [/toleranceAbove|above/i, /below/i]) await page.getByLabel(label).first().fill('0.2');
  await page.getByLabel('What this version changes').fill('The tolerance is narrower.');
  await page.getByRole('button', { name: 'Save and publish…' }).click();
  await page.getByRole('dialog').getByRole('button', { name: 'Publish', exact: true }).click();
  await expect(page.getByText(/Published as version 2\./)).toBeVisible();
  expect(consoleErrors).toEqual([]);

  await engineer.reload();
  await expect(row).toContainText('Fail');
  await expect(row).toContainText('0.2 LU under');
  await expect(engineer.getByText('Harrow Kids long form, version 2')).toBeVisible();
});
