import { execFile } from 'node:child_process';
import { createHash } from 'node:crypto';
import { mkdtemp, readdir, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { db } from '../../../src/server/db/connection.ts';
import type { MeasureElsewhere, MeasuringOutcome } from '../../../src/server/queue/measuring-contract.ts';
import { progressKey } from '../../../src/server/queue/progress.ts';
import { redis } from '../../../src/server/redis.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { measureObject } from '../../../src/server/services/measure-object.ts';
import { measureDeliverable } from '../../../src/server/services/measuring.ts';
import { getObject } from '../../../src/server/storage/storage.ts';
import { arrivedFile } from '../arrived-file.ts';
import { makeAssignment, makeSpecVersion } from '../../factories/world.ts';
import { makeAgreedChannel, makePerson, openServiceWorld, organisationOf } from '../service-world.ts';
import { gateBefore } from '../storage-gate.ts';
import { sineWave } from '../wave-file.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let gate: Awaited<ReturnType<typeof gateBefore>>;
let engineer: MemberScope;
const wave = sineWave(5);
beforeAll(async () => {
  gate = await gateBefore(process.env.TEST_S3_ENDPOINT);
  world = await openServiceWorld(4, { S3_ENDPOINT: gate.url });
  engineer = await makePerson();
});
afterAll(async () => {
  await world.close();
  await gate.close();
});

/** The real measuring, in this process. */
const here: MeasureElsewhere = (task, options) =>
  measureObject(task, { ...options, onRead: () => {}, scratchDir: tmpdir() });
const dies: MeasureElsewhere = () => Promise.reject(new Error('ended with SIGSEGV'));
const measure = (id: string, how: MeasureElsewhere = here, signal = new AbortController().signal) =>
  measureDeliverable(id, how, signal);
const row = (id: string) => db()('deliverables').where({ id }).first();
const measurements = (id: string) => db()('measurements').where({ deliverable_id: id });

describe('measuring a deliverable', () => {
  it('writes figures, series, hash and state', async () => {
    const id = await arrivedFile(engineer, wave);
    expect(await measure(id)).toEqual({ kind: 'measured' });
    const sha256 = createHash('sha256').update(wave).digest('hex');
    expect(await row(id)).toMatchObject({ state: 'measured', sha256, reason: null });
    const [made] = await measurements(id);
    expect(made).toMatchObject({
      sha256,
      organisation_id: engineer.organisationId,
      format: { container: 'WAV', channels: 2 },
    });
    expect(made.format.durationSeconds).toBeCloseTo(5, 6);
    // BS.1770: a 1 kHz stereo sine of -20 dBFS peak stands at -20.0 LUFS within 0.05 (997 Hz: -3.01 LUFS per channel at 0 dBFS).
    expect(made.figures.loudness.integratedLufs).toBeCloseTo(-20, 1);
    expect((await getObject(made.series_key)).length).toBeGreaterThan(0);
    expect(await db()('audit_events').where({ subject_id: id }).pluck('action')).toEqual([
      'deliverable.measured',
    ]);
    expect(await redis().get(progressKey(id))).toBeNull();
  });

  it('judges at once against the spec of each channel that the deliverable is for', async () => {
    const distributor = await makePerson(['spec_owner'], 'distributor');
    const channelId = await makeAgreedChannel(distributor, engineer);
    const { id: specVersionId, specId } = await makeSpecVersion(db(), organisationOf(distributor));
    await makeAssignment(db(), organisationOf(distributor), { id: channelId }, specId);
    const id = await arrivedFile(engineer, wave);
    await db()('deliverable_channels').insert({
      deliverable_id: id,
      organisation_id: engineer.organisationId,
      channel_id: channelId,
    });
    await measure(id);
    const verdicts = await db()('verdicts as v')
      .join('deliverable_channels as dc', 'dc.verdict_id', 'v.id')
      .where('dc.deliverable_id', id);
    expect(verdicts).toHaveLength(1);
    // The sine stands at -20.0 LUFS where -23.0 is asked.
    expect(verdicts[0]).toMatchObject({ spec_version_id: specVersionId, outcome: 'fail' });
  });

  it('measures what has to be decoded first, and leaves nothing on the scratch disk', async () => {
    const scratchDir = await mkdtemp(join(tmpdir(), 'plimsoll-test-'));
    await writeFile(join(scratchDir, 'a.wav'), wave);
    await promisify(execFile)('ffmpeg', [
      '-v',
      'error',
      '-i',
      join(scratchDir, 'a.wav'),
      join(scratchDir, 'a.flac'),
    ]);
    const id = await arrivedFile(engineer, await readFile(join(scratchDir, 'a.flac')), {
      fileName: 'tallow.flac',
    });
    await Promise.all(['a.wav', 'a.flac'].map((name) => rm(join(scratchDir, name))));
    const decoding: MeasureElsewhere = (task, options) =>
      measureObject(task, { ...options, onRead: () => {}, scratchDir });
    expect(await measure(id, decoding)).toEqual({ kind: 'measured' });
    const [made] = await measurements(id);
    expect(made.format).toMatchObject({ container: 'FLAC', channels: 2, sampleRateHz: 48_000 });
    expect(made.figures.loudness.integratedLufs).toBeCloseTo(-20, 1);
    expect(await readdir(scratchDir)).toEqual([]);
    await rm(scratchDir, { recursive: true });
  });

  it('doubles nothing when it is run again, or twice at once', async () => {
    const id = await arrivedFile(engineer, wave);
    await Promise.all([measure(id), measure(id)]);
    expect(await measure(id)).toEqual({ kind: 'nothing-to-do' });
    expect(await measurements(id)).toHaveLength(1);
    expect(await db()('audit_events').where({ subject_id: id })).toHaveLength(1);
    expect((await row(id)).state).toBe('measured');
  });

  it('tells progress by programme time while it goes on', async () => {
    const id = await arrivedFile(engineer, wave);
    const told: number[] = [];
    let kept: string | null = null;
    await measure(id, async (task, options) => {
      options.onProgress({ secondsDone: 2, secondsTotal: 5 });
      kept = await redis().get(progressKey(id));
      return here(task, { ...options, onProgress: ({ secondsDone }) => void told.push(secondsDone) });
    });
    expect(JSON.parse(kept ?? '')).toEqual({ secondsDone: 2, secondsTotal: 5 });
    expect(told.length).toBeGreaterThan(0);
    expect(told.at(-1)).toBeCloseTo(5, 0);
  });

  it('measures nothing that was discarded or is not there', async () => {
    const id = await arrivedFile(engineer, wave);
    await db()('deliverables').where({ id }).update({ discarded_at: db().fn.now() });
    expect(await measure(id)).toEqual({ kind: 'nothing-to-do' });
    expect(await measure('00000000-0000-4000-8000-000000000000')).toEqual({ kind: 'nothing-to-do' });
  });
});

describe('trouble of the file', () => {
  it('ends as unreadable when the bytes in storage are not those that were sent', async () => {
    const id = await arrivedFile(engineer, wave, { declared: 'a'.repeat(64) });
    expect(await measure(id)).toMatchObject({
      kind: 'unreadable',
      reason: expect.stringMatching(/SHA-256 differs.*Upload it again/),
    });
    expect(await row(id)).toMatchObject({ state: 'unreadable', reason_code: 'hash-mismatch' });
    expect(await measurements(id)).toHaveLength(0);
  });

  it('ends as unreadable, with a sentence, when it is no audio at all', async () => {
    const id = await arrivedFile(engineer, new TextEncoder().encode('This is a shopping list. '.repeat(40)));
    expect(await measure(id)).toMatchObject({
      kind: 'unreadable',
      reason: expect.stringMatching(/\w+.*\.$/),
    });
    expect(await row(id)).toMatchObject({
      state: 'unreadable',
      sha256: expect.stringMatching(/^[0-9a-f]{64}$/),
    });
  });

  it('says that the bytes changed rather than that they are no audio, when both are so', async () => {
    const id = await arrivedFile(engineer, new TextEncoder().encode('no audio'), {
      declared: 'b'.repeat(64),
    });
    await measure(id);
    expect((await row(id)).reason_code).toBe('hash-mismatch');
  });

  it('ends as unreadable when storage has lost it', async () => {
    const id = await arrivedFile(engineer, wave);
    await db()('deliverables')
      .where({ id })
      .update({ storage_key: `gone/${id}` });
    expect(await measure(id)).toMatchObject({ kind: 'unreadable' });
    expect((await row(id)).reason_code).toBe('missing');
  });

  it('ends as unreadable when it has killed its worker three times, and is not begun a fourth time', async () => {
    const id = await arrivedFile(engineer, wave);
    await expect(measure(id, dies)).rejects.toThrow('SIGSEGV');
    await expect(measure(id, dies)).rejects.toThrow('SIGSEGV');
    expect((await row(id)).state).toBe('measuring');
    expect(await measure(id, dies)).toMatchObject({
      kind: 'unreadable',
      reason: expect.stringMatching(/broke down 3 times/),
    });
    expect(await row(id)).toMatchObject({ state: 'unreadable', reason_code: 'kills-worker' });
    expect(await measure(id)).toEqual({ kind: 'nothing-to-do' });
  });

  it('counts deaths that nobody was left to tell of', async () => {
    const id = await arrivedFile(engineer, wave);
    // Three workers took it and were gone.
    await db()('deliverables').where({ id }).update({ state: 'measuring', measure_attempts: 3 });
    let begun = false;
    const end = await measure(id, (task, options) => {
      begun = true;
      return here(task, options);
    });
    expect(begun).toBe(false);
    expect(end.kind).toBe('unreadable');
  });
});

describe('trouble of the surroundings', () => {
  it('is tried again while storage is away, is never held against the file, and ends well when storage is back', async () => {
    const id = await arrivedFile(engineer, wave);
    gate.cut();
    for (let time = 0; time < 4; time++) {
      await expect(measure(id)).rejects.toThrow(/Storage failed/);
      expect(await row(id)).toMatchObject({ state: 'waiting', measure_attempts: 0 });
    }
    gate.mend();
    expect(await measure(id)).toEqual({ kind: 'measured' });
  });

  it('is handed back when its worker is told to stop', async () => {
    const id = await arrivedFile(engineer, wave);
    const stop = new AbortController();
    const stopped: MeasureElsewhere = async () => {
      stop.abort();
      return { kind: 'surroundings', message: 'stopped' } satisfies MeasuringOutcome;
    };
    expect(await measure(id, stopped, stop.signal)).toEqual({ kind: 'handed-back' });
    expect(await row(id)).toMatchObject({ state: 'waiting', measure_attempts: 0 });
  });
});
