/** How fast a browser measures: the bench's own worker in headless Chromium, on a file of the disk. */
import { rmSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { availableParallelism } from 'node:os';
import { join } from 'node:path';
import { build } from 'esbuild';
import { chromium } from 'playwright-core';
import { root } from '../../workers/local/places.mjs';
import type {} from './browser-page.ts';
import { writeWave } from './wave-file.ts';

export interface BrowserResult {
  workers: number;
  minutes: number;
  /** For all files, from the question to the last answer. */
  seconds: number;
  /** Seconds of programme per second, all files together. */
  timesRealTime: number;
  asked: number | null;
}

/** Times real time that one worker is asked for. */
const asked = 800;

async function serve(): Promise<Server> {
  const bundle = await build({
    entryPoints: {
      page: join(root, 'tests/bench/browser-page.ts'),
      'measure-worker': join(root, 'src/components/bench/measure-worker.ts'),
    },
    bundle: true,
    minify: true,
    format: 'esm',
    target: 'es2022',
    outdir: '/',
    write: false,
    absWorkingDir: root,
    logLevel: 'error',
  });
  const scripts = new Map(bundle.outputFiles.map(({ path, text }) => [path, text]));
  const html =
    '<!doctype html><title>Bench</title><input type="file" /><script type="module" src="/page.js"></script>';
  const server = createServer(({ url = '/' }, response) => {
    const script = scripts.get(url);
    response.setHeader('content-type', script ? 'text/javascript' : 'text/html');
    response.statusCode = script || url === '/' ? 200 : 404;
    response.end(script ?? (url === '/' ? html : ''));
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  return server;
}

/** One worker, then as many as there are cores, each with the whole file; the best of the rounds, after one that warms up. */
export async function measureInBrowser(
  minutes: number,
  rounds: number,
  folder: string,
): Promise<BrowserResult[]> {
  const file = join(folder, 'browser.wav');
  const server = await serve();
  const browser = await chromium.launch({
    executablePath: '/usr/bin/chromium',
    args: ['--no-sandbox', '--disable-gpu', '--disable-dev-shm-usage', '--no-first-run'],
  });
  try {
    writeWave(file, { kind: 'broadcast', layout: 'stereo', sampleRateHz: 48_000, seconds: minutes * 60 });
    const page = await browser.newPage();
    page.setDefaultTimeout(600_000);
    await page.goto(`http://127.0.0.1:${(server.address() as AddressInfo).port}/`);
    await page.setInputFiles('input', file);
    const results: BrowserResult[] = [];
    for (const workers of new Set([1, availableParallelism()])) {
      let seconds = Infinity;
      for (let round = 0; round < rounds + 1; round++) {
        const run = await page.evaluate((count) => window.measureTogether(count), workers);
        const isWhole = run.durationSeconds.every((one) => one === minutes * 60);
        if (!isWhole || new Set(run.integratedLufs).size !== 1)
          throw new Error(`The browser's workers did not all measure the whole file: ${JSON.stringify(run)}`);
        seconds = Math.min(seconds, run.seconds);
      }
      results.push({
        workers,
        minutes,
        seconds,
        timesRealTime: (workers * minutes * 60) / seconds,
        asked: workers === 1 ? asked : null,
      });
    }
    return results;
  } finally {
    await browser.close();
    server.close();
    rmSync(file, { force: true });
  }
}
