import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { expect, test, type Browser, type BrowserContextOptions, type Page } from '@playwright/test';
import { awake, expectAccessible, openAs, origin } from './people.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
const folder = mkdtempSync(join(tmpdir(), 'plimsoll-bench-'));
test.afterAll(() => rmSync(folder, { recursive: true }));

/** A stereo file of noise with a louder stretch, made by ffmpeg. */
function noise(name: string, seconds: number, amplitude: number, ...options: string[]): string {
  const path = join(folder, name);
  const source = (seed: number) =>
    `anoisesrc=color=pink:duration=${seconds}:sample_rate=48000:amplitude=${amplitude}:seed=${seed}`;
  execFileSync('ffmpeg', [
    ...['-v', 'error', '-y', '-f', 'lavfi', '-i', source(1), '-f', 'lavfi', '-i', source(2)],
    ...['-filter_complex', "[0][1]amerge=inputs=2,volume='if(between(t,2,6),2.5,1)':eval=frame", '-ac', '2'],
    ...(options.length > 0 ? options : ['-c:a', 'pcm_s24le']),
    path,
  ]);
  return path;
}

/** What `npm run measure -- --json` says of a file. */
function measuredByCommand(path: string): Record<string, unknown> {
  const said = execFileSync(process.execPath, ['workers/local/measure.mjs', path, '--json'], {
    cwd: root,
    encoding: 'utf8',
    env: { ...process.env, INIT_CWD: root },
  });
  const [{ error, file: _path, ...figures }] = JSON.parse(said) as Record<string, unknown>[];
  expect(error).toBeNull();
  expect(Object.keys(figures)).toEqual(
    expect.arrayContaining(['format', 'loudness', 'truePeak', 'samplePeak', 'findings']),
  );
  return figures;
}

/** The whole figures of the file in hand, as the page saves them. */
async function savedFigures(page: Page): Promise<Record<string, unknown>> {
  const saving = page.waitForEvent('download');
  await page.getByRole('button', { name: 'Save the figures as JSON' }).click();
  return JSON.parse(readFileSync(await (await saving).path(), 'utf8')) as Record<string, unknown>;
}

/** A wave header that promises `bytes` of 24-bit stereo, and a file of that length full of nothing (sparse on disk). */
function silence(name: string, bytes: number): string {
  const path = join(folder, name);
  const head = Buffer.alloc(44);
  head.write('RIFF', 0);
  head.writeUInt32LE(36 + bytes, 4);
  head.write('WAVEfmt ', 8);
  head.writeUInt32LE(16, 16);
  head.writeUInt16LE(1, 20);
  head.writeUInt16LE(2, 22);
  head.writeUInt32LE(48_000, 24);
  head.writeUInt32LE(288_000, 28);
  head.writeUInt16LE(6, 32);
  head.writeUInt16LE(24, 34);
  head.write('data', 36);
  head.writeUInt32LE(bytes, 40);
  writeFileSync(path, head);
  truncateSync(path, 44 + bytes);
  return path;
}

async function visit(browser: Browser, options: BrowserContextOptions = {}) {
  const context = await browser.newContext({ viewport: { width: 1440, height: 900 }, ...options });
  const page = await context.newPage();
  const consoleErrors: string[] = [];
  page.on('console', (message) => message.type() === 'error' && consoleErrors.push(message.text()));
  page.on('pageerror', (error) => consoleErrors.push(error.message));
  await page.goto(`${origin()}/`);
  await awake(page);
  await page.waitForLoadState('networkidle');
  return { context, page, consoleErrors };
}

const files = (page: Page) => page.getByRole('table', { name: 'Files on the bench' });
const rowOf = (page: Page, name: string | RegExp) => files(page).getByRole('row', { name });
const put = (page: Page, ...paths: string[]) => page.getByLabel('Files to measure').setInputFiles(paths);
const verdict = /^(Pass|Advisory|Fail)$/;

test('a visitor drops a mix: measured to the last digit as the command does, with nothing sent', async ({
  browser,
}) => {
  const path = noise('tallow_104_mixst_v2.wav', 70, 0.25);
  const { context, page, consoleErrors } = await visit(browser);
  await expect(page.getByText('Nothing leaves this machine.')).toBeVisible();
  await expectAccessible(page);
  const requests: string[] = [];
  page.on('request', (request) => requests.push(`${request.method()} ${request.url()}`));
  // What the page promises: it measures without a network.
  await context.setOffline(true);

  // Dropped, as a person does; the bytes come from the test.
  const bytes = readFileSync(path).toString('base64');
  const carried = await page.evaluateHandle(
    ({ name, base64 }) => {
      const carrier = new DataTransfer();
      carrier.items.add(new File([Uint8Array.from(atob(base64), (c) => c.charCodeAt(0))], name));
      return carrier;
    },
    { name: 'tallow_104_mixst_v2.wav', base64: bytes },
  );
  await page.dispatchEvent('body', 'dragover', { dataTransfer: carried });
  await page.dispatchEvent('body', 'drop', { dataTransfer: carried });
  await expect(rowOf(page, /tallow_104/).getByText(verdict)).toBeVisible();
  await expect(page.locator('canvas')).toBeVisible();
  expect(requests).toEqual([]);

  const command = measuredByCommand(path);
  expect(await savedFigures(page)).toMatchObject(command);

  // What stands on the page is that figure, as shown.
  const integrated = (command.loudness as { integratedLufs: number }).integratedLufs;
  const shown = `${integrated < 0 ? '−' : ''}${Math.abs(integrated).toFixed(1)}`;
  await expect(rowOf(page, /tallow_104/)).toContainText(`${shown}LUFS`);
  await expect(page.getByRole('table', { name: 'Rules' })).toContainText(shown);

  expect(consoleErrors).toEqual([]);
  await context.setOffline(false);
  requests.length = 0;
  // Another spec is judged at once, and says where its limit is passed.
  await page.getByRole('button', { name: /EBU R 128 s1, short form/ }).click();
  await expect(page.getByRole('table', { name: 'Rules' })).toContainText('Maximum short-term');
  await expect(page.getByText(/national broadcast-loudness law prevail/)).toBeVisible();
  // The browser itself asks for the page's icon anew when the address changes.
  expect(requests.filter((request) => !request.endsWith('/favicon.svg'))).toEqual([]);
  await expectAccessible(page);
});

test('other rates, depths, containers and layouts come out as the command measures them', async ({
  browser,
}) => {
  const paths = [
    noise('a.aiff', 6, 0.3, '-c:a', 'pcm_s16be', '-ar', '44100', '-ac', '1'),
    noise('b.wav', 6, 0.3, '-c:a', 'pcm_f32le', '-ar', '96000', '-ac', '6'),
    noise('c.wav', 6, 0.3, '-c:a', 'pcm_s32le', '-ar', '22050', '-rf64', 'always'),
  ];
  const { page } = await visit(browser);
  await put(page, ...paths);
  for (const path of paths) {
    const row = rowOf(page, new RegExp(basename(path).replace('.', '\\.')));
    await expect(row.getByText(verdict)).toBeVisible();
    await row.click({ position: { x: 60, y: 10 } });
    await expect(page.getByRole('heading', { name: basename(path) })).toBeVisible();
    expect(await savedFigures(page)).toMatchObject(measuredByCommand(path));
  }
});

test('the page of a visitor, and the worker that measures, may connect to nothing', async ({ browser }) => {
  const { page } = await visit(browser);
  // One question that the policy must refuse, on the page and in the worker's place.
  const refused = await page.evaluate(() =>
    fetch('/api/health').then(
      () => 'answered',
      () => 'refused',
    ),
  );
  expect(refused).toBe('refused');
  const script = await page.evaluate(
    () => performance.getEntriesByType('resource').find(({ name }) => name.includes('measure-worker'))?.name,
  );
  const answer = await page.request.get(script ?? '');
  expect(answer.headers()['content-security-policy']).toMatch(/^default-src 'none'/);
});

for (const [name, options] of Object.entries({
  'wide, Paper': { colorScheme: 'light' },
  'wide, Night watch': { colorScheme: 'dark' },
  '360 px, Paper': { colorScheme: 'light', viewport: { width: 360, height: 740 } },
  '360 px, Night watch': { colorScheme: 'dark', viewport: { width: 360, height: 740 } },
} satisfies Record<string, BrowserContextOptions>))
  test(`five files at once, a text and a broken one among them, are told apart (${name})`, async ({
    browser,
  }) => {
    const short = noise('spot30_v3.wav', 8, 0.1);
    const loud = noise('gales_211_st.wav', 10, 0.6);
    const coded = noise('salt_signal_12.mp3', 10, 0.3, '-b:a', '128k');
    const broken = join(folder, 'broken.wav');
    writeFileSync(broken, readFileSync(loud).subarray(0, 400_000));
    const text = join(folder, 'notes.txt');
    writeFileSync(text, 'The Tallow Road: notes for the mix.\n');
    const { page, consoleErrors } = await visit(browser, options);
    await put(page, short, loud, coded, broken, text);
    for (const path of ['spot30_v3.wav', 'gales_211_st.wav', 'salt_signal_12.mp3', 'broken.wav'])
      await expect(rowOf(page, new RegExp(path.replace('.', '\\.'))).getByText(verdict)).toBeVisible();
    await expect(rowOf(page, /broken\.wav/)).toContainText('cut short');
    await expect(rowOf(page, /notes\.txt/)).toContainText('This is no audio file that can be read here');
    await expect(rowOf(page, /notes\.txt/)).toContainText('No figures');
    await rowOf(page, /salt_signal/).click({ position: { x: 60, y: 10 } });
    await expect(page.getByText(/A preview: decoded by this browser\./)).toBeVisible();
    await expect(page.getByText(/measured again by the service/)).toBeVisible();
    await expectAccessible(page);
    // Nothing stands out of the window.
    expect(await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)).toBe(0);

    await put(page, loud);
    await expect(
      page.getByText('One of these files lies on the bench already; it was left out.'),
    ).toBeVisible();
    expect(consoleErrors).toEqual([]);
  });

test('a file in work is stopped, and the bench goes on', async ({ browser }) => {
  // Two hours of it, so that there is time to stop.
  const long = silence('long.wav', 2_000_000_004);
  const { page } = await visit(browser);
  await put(page, long, silence('longer.wav', 2_100_000_000));
  await page.getByRole('button', { name: 'Stop long.wav' }).click();
  await expect(rowOf(page, /\blong\.wav/)).toContainText('Stopped');
  await page.getByRole('button', { name: 'Stop all' }).click();
  await expect(rowOf(page, /longer\.wav/)).toContainText('Stopped');
  await put(page, noise('after.wav', 8, 0.3));
  await expect(rowOf(page, /after\.wav/).getByText(verdict)).toBeVisible();
  await page.getByRole('button', { name: 'Measure long.wav again' }).click();
  await expect(rowOf(page, /\blong\.wav/)).toContainText(/Measuring \d/);
  await page.getByRole('button', { name: 'Stop long.wav' }).click();
});

test('a mix engineer hands bench files over, and the service comes to the same figures', async ({
  browser,
}) => {
  const { page, consoleErrors } = await openAs(browser, 'mix@copperkettle.example');
  await page
    .getByRole('navigation', { name: 'Places', exact: true })
    .getByRole('link', { name: 'Bench' })
    .click();
  await awake(page);
  await put(page, noise('tallow_203_mixst_v1.wav', 12, 0.3));
  await expect(rowOf(page, /tallow_203/).getByText(verdict)).toBeVisible();
  // Of the channels' own specs, and of published ones.
  await expect(page.getByRole('button', { name: /EBU R 128, produced programme/ })).toBeVisible();
  await page.getByRole('button', { name: 'Upload this', exact: true }).click();
  const dialog = page.getByRole('dialog');
  await expect(dialog).toContainText('Now the files leave this machine');
  await dialog.getByLabel('Harrow One').check();
  await expectAccessible(page);
  await dialog.getByRole('button', { name: 'Upload it' }).click();
  const report = rowOf(page, /tallow_203/).getByRole('link', { name: 'Report' });
  await expect(report).toBeVisible({ timeout: 60_000 });
  // The bench's own figures still stand in the row.
  await expect(rowOf(page, /tallow_203/)).toContainText('LUFS');
  await report.click();
  await expect(page.getByText(/and again by the service: the figures are the same/)).toBeVisible();
  expect(consoleErrors).toEqual([]);
});
