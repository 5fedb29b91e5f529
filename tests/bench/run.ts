/**
 * `npm run bench -- [--quick] [--only=broadcast,growth] [--rounds=N] [--json FILE]`: how fast the measurement is, held
 * against ffmpeg in the same run, on files made now and removed after. Says what was asked of a row; fails on errors only,
 * since a busy machine is none.
 */
import { execFileSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { availableParallelism, cpus, loadavg, tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { parseArgs } from 'node:util';
import { measureInBrowser, type BrowserResult } from './browser.ts';
import { idleMegabytes, measureLength, type GrowthResult } from './growth.ts';
import { howItIsMade } from './material.ts';
import { buildPrograms } from './programs.ts';
import { measureRow, ratioRows, type RatioResult } from './ratios.ts';
import { browserTable, growthTable, ratioTable } from './table.ts';
import { stopAll } from './timing.ts';

const names = [...ratioRows.map(({ name }) => name), 'browser', 'growth'];

function options() {
  const { values } = parseArgs({
    options: {
      quick: { type: 'boolean', default: false },
      only: { type: 'string', multiple: true, default: [] },
      rounds: { type: 'string', default: '2' },
      json: { type: 'string' },
    },
  });
  const only = values.only.flatMap((list) => list.split(','));
  const unknown = only.filter((name) => !names.includes(name));
  if (unknown.length > 0)
    throw new Error(`There is no row ${unknown.join(', ')}. The rows are ${names.join(', ')}.`);
  const rounds = Number(values.rounds);
  if (!Number.isInteger(rounds) || rounds < 1 || rounds > 20)
    throw new Error(`--rounds is a whole number from 1 to 20, not ${values.rounds}.`);
  return { ...values, rounds, wanted: (name: string) => only.length === 0 || only.includes(name) };
}

function fail(error: unknown): never {
  console.error(error instanceof Error ? error.message : error);
  process.exit(2);
}

const { quick, rounds, json, wanted } = (() => {
  try {
    return options();
  } catch (error) {
    return fail(error);
  }
})();

const folder = mkdtempSync(join(tmpdir(), 'plimsoll-bench-'));
const programs = await buildPrograms();
const clean = () => [folder, programs.folder].forEach((one) => rmSync(one, { recursive: true, force: true }));
for (const signal of ['SIGINT', 'SIGTERM'] as const)
  process.once(signal, () => {
    stopAll();
    clean();
    process.exit(130);
  });

const say = (text: string) => process.stderr.write(`${text} …\n`);
const machine = {
  cpu: cpus()[0]?.model ?? 'unknown',
  cores: availableParallelism(),
  node: process.version,
  ffmpeg: execFileSync('ffmpeg', ['-version'], { encoding: 'utf8' }).split('\n')[0],
  loadAtStart: loadavg()[0],
  loadAtEnd: 0,
};

try {
  const idle = await idleMegabytes(folder, programs);
  const ratios: RatioResult[] = [];
  for (const row of ratioRows.filter(({ name }) => wanted(name))) {
    say(row.label);
    ratios.push(await measureRow(row, quick ? 600 : 3600, rounds, folder, programs));
  }
  let browser: BrowserResult[] = [];
  if (wanted('browser')) {
    say('the browser');
    browser = await measureInBrowser(quick ? 20 : 60, rounds, folder);
  }
  const growth: GrowthResult[] = [];
  for (const minutes of wanted('growth') ? (quick ? [1, 10, 60] : [1, 10, 60, 480]) : []) {
    say(`growth, ${minutes} min`);
    growth.push(await measureLength(minutes, rounds, folder, programs));
  }
  machine.loadAtEnd = loadavg()[0];
  const tables = [
    ...(ratios.length > 0 ? [ratioTable(ratios, idle)] : []),
    ...(browser.length > 0 ? [browserTable(browser)] : []),
    ...(growth.length > 0 ? [growthTable(growth, idle)] : []),
  ];
  const foot = [
    `${machine.cpu}, ${machine.cores} cores, load ${machine.loadAtStart.toFixed(1)} at the start, ${machine.loadAtEnd.toFixed(1)} at the end; Node ${machine.node}; ${machine.ffmpeg.split(' Copyright')[0]}.`,
    `Best of ${rounds}, ours and ffmpeg in turn, start-up included. ffmpeg measures by ebur128=peak=true, quietly; of an MP3 it decodes only (-f null).`,
    `MB: peak resident memory, looked up every 5 ms, an MP3’s decoder included; CPU s: of all cores, to tell a busy machine from a slow program. Idle is our process with 1 s to measure: ${idle?.toFixed(0) ?? '–'} MB.`,
    ...howItIsMade,
  ];
  console.log(`\n${[...tables, foot.join('\n')].join('\n\n')}`);
  const results = { machine, rounds, idle, ratios, browser, growth };
  // npm runs scripts in the project's folder; a name is meant from where the person stands.
  if (json)
    writeFileSync(resolve(process.env.INIT_CWD ?? '.', json), `${JSON.stringify(results, null, 1)}\n`);
} finally {
  clean();
}
