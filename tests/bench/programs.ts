/** What the bench runs: the product's own processes as `npm run build` bundles them, the conversion alone, and ffmpeg. */
import { mkdirSync, mkdtempSync } from 'node:fs';
import { join } from 'node:path';
import { buildKernel, bundleProcesses } from '../../workers/local/build.mjs';
import { root } from '../../workers/local/places.mjs';

export interface Command {
  program: string;
  args: string[];
}

export interface Programs {
  /** Holds the bundles; the caller removes it. */
  folder: string;
  measure(file: string): Command;
  convertAlone(file: string): Command;
}

/** Builds the kernel where its source changed, and bundles the processes beside the packages that they import. */
export async function buildPrograms(): Promise<Programs> {
  buildKernel();
  const cache = join(root, 'node_modules/.cache');
  mkdirSync(cache, { recursive: true });
  const folder = mkdtempSync(join(cache, 'plimsoll-bench-'));
  const entries = ['workers/measure-files', 'tests/bench/convert-alone'];
  await bundleProcesses(
    entries.map((entry) => join(root, `${entry}.ts`)),
    folder,
  );
  const [measure, convertAlone] = entries.map((entry) => join(folder, `${entry}.mjs`));
  return {
    folder,
    measure: (file) => ({ program: process.execPath, args: [measure, '--json', file] }),
    convertAlone: (file) => ({ program: process.execPath, args: [convertAlone, file] }),
  };
}

const ffmpeg = (file: string, ...more: string[]): Command => ({
  program: 'ffmpeg',
  args: ['-nostdin', '-v', 'error', '-i', file, ...more, '-f', 'null', '-'],
});

/** ffmpeg's own measurement; quiet, since a line per 100 ms would cost it time. */
export const ebur128 = (file: string): Command => ffmpeg(file, '-af', 'ebur128=peak=true');
export const bareDecode = (file: string): Command => ffmpeg(file);
