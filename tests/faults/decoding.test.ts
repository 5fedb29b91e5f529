import { execFileSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, afterEach, beforeAll, expect, it, vi } from 'vitest';
import { config } from '../../src/server/config.ts';
import { db } from '../../src/server/db/connection.ts';
import { enqueueMeasuring } from '../../src/server/queue/measuring-queue.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { arrivedFile } from '../server/arrived-file.ts';
import { makePerson, openServiceWorld } from '../server/service-world.ts';
import { listenTo, measuringProcess, startWorker, type WorkerProcess } from './measuring-processes.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let engineer: MemberScope;
let flac: Buffer;
let workers: WorkerProcess[] = [];
const worker = async () => {
  const started = await startWorker();
  workers.push(started);
  return started;
};
beforeAll(async () => {
  world = await openServiceWorld(13);
  engineer = await makePerson();
  const folder = mkdtempSync(join(tmpdir(), 'plimsoll-test-'));
  // Hours of silence: a small file that takes its decoder a while.
  const silence = ['-f', 'lavfi', '-i', 'anullsrc=sample_rate=48000:channel_layout=stereo', '-t', '10800'];
  execFileSync('ffmpeg', ['-v', 'error', ...silence, 'long.flac'], { cwd: folder });
  flac = readFileSync(join(folder, 'long.flac'));
  rmSync(folder, { recursive: true });
});
afterEach(async () => {
  for (const one of workers) one.kill('SIGKILL');
  await Promise.all(workers.map((one) => one.ended));
  workers = [];
});
afterAll(() => world.close());

const commandOf = (pid: number | string) => {
  try {
    return readFileSync(`/proc/${pid}/comm`, 'utf8').trim();
  } catch {
    return null; // it ended
  }
};
/** A process that ended stays in the table until its new parent looks after it. */
const isAlive = (pid: number) =>
  existsSync(`/proc/${pid}`) && !/^State:\s+Z/m.test(readFileSync(`/proc/${pid}/status`, 'utf8'));

it('kill -9 of a worker in mid-decoding leaves no decoder, and its scratch files go at the next start', async () => {
  const events = await listenTo(engineer.organisationId);
  const id = await arrivedFile(engineer, flac, { fileName: 'long.flac' });
  const first = await worker();
  await enqueueMeasuring(id);
  await events.next((event) => event.id === id && (event.progress?.secondsDone ?? 0) > 0);
  const measuring = measuringProcess(id) ?? NaN;
  const decoder = Number(
    readFileSync(`/proc/${measuring}/task/${measuring}/children`, 'utf8')
      .split(' ')
      .find((pid) => commandOf(pid) === 'ffmpeg'),
  );
  const scratch = join(config().SCRATCH_DIR, `measuring-${measuring}`);
  expect(isAlive(decoder)).toBe(true);
  expect(existsSync(scratch)).toBe(true);

  first.kill('SIGKILL');
  await first.ended;
  await vi.waitFor(() => expect([measuring, decoder].filter(isAlive)).toEqual([]), 20_000);
  await worker();
  expect(existsSync(scratch)).toBe(false);
  await events.next((event) => event.id === id && event.state === 'measured');
  expect(await db()('measurements').where({ deliverable_id: id })).toHaveLength(1);
  events.close();
}, 120_000);
