import { mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, test } from '@playwright/test';
import { writeMaster } from './masters.ts';
import { manyTrackWave } from '../server/many-track-file.ts';
import { awake, expectAccessible, openAs, origin } from './people.ts';

const folder = mkdtempSync(join(tmpdir(), 'plimsoll-masters-'));

test('a mix engineer has a file measured another way: a window, and two presentations', async ({
  browser,
}) => {
  const master = join(folder, 'tallow_501_mixst_v1.wav');
  writeMaster(master, -23, 31);
  const { page, consoleErrors } = await openAs(browser, 'mix@copperkettle.example');
  await page.goto(`${origin()}/deliverables/add`);
  await awake(page);
  await page.getByLabel('Harrow One').check();
  await page.locator('input[type="file"]').setInputFiles([master]);
  await page.getByRole('link', { name: 'Report for Harrow One' }).click({ timeout: 60_000 });
  await awake(page);
  await expect(page.getByText('Measured whole.')).toBeVisible();

  await page.getByRole('button', { name: 'How it is measured' }).click();
  const dialog = page.getByRole('dialog', { name: 'How it is measured' });
  await dialog.getByLabel('Frames a second').selectOption('25');
  await dialog.getByLabel('From', { exact: true }).fill('00:00:59:00');
  await dialog.getByRole('button', { name: 'Measure again' }).click();
  await expect(dialog.getByText(/The file lasts 12\.000 s/)).toBeVisible();
  await dialog.getByLabel('From', { exact: true }).fill('00:00:02:00');
  await dialog.getByLabel('The 2 audio channels play').selectOption('Each audio channel alone');
  await dialog.getByLabel('Name of presentation 2').fill('Right side');
  await expectAccessible(page);
  await dialog.getByRole('button', { name: 'Measure again' }).click();

  const tabs = page.getByRole('navigation', { name: 'Presentations' });
  await expect(tabs.getByRole('link')).toHaveCount(2, { timeout: 60_000 });
  await expect(
    page.getByText(
      'Measured from 00:00:02:00 to the end, as 2 presentations: Audio channel 1 (M), Right side (M).',
    ),
  ).toBeVisible();
  await tabs.getByRole('link', { name: /Right side/ }).click();
  await expect(page).toHaveURL(/presentation=2/);
  await expect(page.getByText('00:00:02:00 to 00:00:12:00')).toBeVisible();
  await awake(page);
  await expect(page.locator('canvas')).toBeVisible();
  await expectAccessible(page);

  await page.getByRole('button', { name: 'How it is measured' }).click();
  await dialog.getByRole('button', { name: 'Fill in' }).first().click();
  await dialog.getByRole('button', { name: 'Measure again' }).click();
  // Measured so before: nothing is waited for.
  await expect(page.getByText('Measured whole.')).toBeVisible();
  expect(consoleErrors).toEqual([]);
});

test('mono files that are one programme are taken as one deliverable', async ({ browser }) => {
  const files = ['L', 'R'].map((speaker, i) => {
    const path = join(folder, `tallow_502.${speaker}.wav`);
    writeFileSync(path, manyTrackWave([{ dbfs: -23 - i }], 4));
    return path;
  });
  const { page, consoleErrors } = await openAs(browser, 'mix@copperkettle.example');
  await page.goto(`${origin()}/deliverables/add`);
  await awake(page);
  await page.locator('input[type="file"]').setInputFiles(files);
  await expect(page.getByText(/2 files look like one programme: tallow_502/)).toBeVisible();
  await page.getByRole('button', { name: 'Take as one deliverable' }).click({ timeout: 60_000 });
  await expect(page.getByText('tallow_502 (2 mono files) is one deliverable now.')).toBeVisible();
  await expectAccessible(page);
  await page.getByRole('link', { name: 'Its report' }).click();
  await expect(page.getByRole('heading', { name: 'Files of the set' })).toBeVisible({ timeout: 60_000 });
  await expect(page.getByText('stereo (2)')).toBeVisible();
  await page.goto(`${origin()}/deliverables?q=tallow_502`);
  // The head, and the set: its files stand in no list.
  await expect(page.getByRole('table').getByRole('row')).toHaveCount(2);
  expect(consoleErrors).toEqual([]);
});
