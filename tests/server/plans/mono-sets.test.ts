// Several mono files taken as one deliverable, through the real measuring.
import { createHash } from 'node:crypto';
import { tmpdir } from 'node:os';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { createSetSchema, deliverableReportSchema } from '../../../src/domain/api/deliverables.ts';
import { wholeFile } from '../../../src/engine/plan.ts';
import type { Speaker } from '../../../src/engine/layouts.ts';
import { db } from '../../../src/server/db/connection.ts';
import type { MeasureElsewhere } from '../../../src/server/queue/measuring-contract.ts';
import { discardDeliverable, getDeliverableReport } from '../../../src/server/services/deliverables.ts';
import { measureObject } from '../../../src/server/services/measure-object.ts';
import { measureDeliverable } from '../../../src/server/services/measuring.ts';
import { setMeasuringPlan } from '../../../src/server/services/measuring-plans.ts';
import { createSet } from '../../../src/server/services/mono-sets.ts';
import { getDeliverableAudio } from '../../../src/server/services/passages.ts';
import { createSubmissions } from '../../../src/server/services/submissions.ts';
import { makeChain, makeMember } from '../../factories/world.ts';
import { arrivedFile } from '../arrived-file.ts';
import { codeOf, firstOf, refusalOf, valueOf } from '../answers.ts';
import { manyTrackWave } from '../many-track-file.ts';
import { openServiceWorld } from '../service-world.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let chain: Awaited<ReturnType<typeof makeChain>>;
beforeAll(async () => {
  world = await openServiceWorld(10);
  chain = await makeChain(db());
});
afterAll(() => world.close());

const here: MeasureElsewhere = (task, options) =>
  measureObject(task, { ...options, onRead: () => {}, scratchDir: tmpdir() });
const measure = (id: string) => measureDeliverable(id, here, new AbortController().signal);
const mono = (dbfs: number, seconds = 5) => manyTrackWave([{ dbfs }], seconds);
const report = async (id: string) =>
  deliverableReportSchema.parse(valueOf(await getDeliverableReport(chain.mixer, id)));
const row = (id: string) => db()('deliverables').where({ id }).first();

async function arrived(
  files: [Speaker, Uint8Array][],
): Promise<{ deliverableId: string; speaker: Speaker }[]> {
  const parts = [];
  for (const [speaker, bytes] of files) {
    const deliverableId = await arrivedFile(chain.mixer, bytes, { fileName: `tallow_104.${speaker}.wav` });
    parts.push({ deliverableId, speaker });
  }
  return parts;
}
const create = (parts: { deliverableId: string; speaker: Speaker }[], scope = chain.mixer) =>
  createSet(scope, createSetSchema.parse({ name: 'tallow_104', parts }));

describe('a set of mono files', () => {
  it('is one deliverable with the details of its first file, measured and judged as what it plays as', async () => {
    const bytes = [mono(-23), mono(-23)];
    const parts = await arrived([
      ['L', bytes[0]],
      ['R', bytes[1]],
    ]);
    await db()('deliverables')
      .where({ id: parts[0].deliverableId })
      .update({ version_label: 'v2', content_kind: 'long_form' });
    await db()('deliverable_channels').insert({
      deliverable_id: parts[0].deliverableId,
      organisation_id: chain.supplier.id,
      channel_id: chain.channel.id,
    });
    const set = valueOf(await create(parts));
    expect(set).toMatchObject({
      fileName: 'tallow_104 (2 mono files)',
      state: 'waiting',
      versionLabel: 'v2',
      byteSize: bytes[0].length + bytes[1].length,
    });
    for (const { deliverableId } of parts)
      expect(codeOf(await getDeliverableReport(chain.mixer, deliverableId))).toBe('not_found');

    expect(await measure(set.id)).toEqual({ kind: 'measured' });
    const measured = await report(set.id);
    expect(measured.measurement?.format).toMatchObject({ layout: 'stereo', channels: 2 });
    // A 1 kHz sine of -23 dBFS peak in both sides stands at -23.0 LUFS (BS.1770-5 Annex 1).
    expect(measured.measurement?.figures.loudness.integratedLufs).toBeCloseTo(-23, 1);
    expect(measured.outcome).not.toBeNull();
    expect(measured.parts.map(({ speaker, fileName }) => [speaker, fileName])).toEqual([
      ['L', 'tallow_104.L.wav'],
      ['R', 'tallow_104.R.wav'],
    ]);
    const hashes = bytes.map((one) => createHash('sha256').update(one).digest('hex'));
    expect(measured.sha256).toBe(createHash('sha256').update(hashes.join('\n')).digest('hex'));
    expect(refusalOf(await getDeliverableAudio(chain.mixer, set.id)).message).toMatch(/cannot play/);
  });

  it('feeds each loudspeaker from its own file', async () => {
    const parts = await arrived([
      ['L', mono(-40)],
      ['R', mono(-40)],
      ['C', mono(-20)],
      ['LFE', mono(-3)],
      ['Ls', mono(-40)],
      ['Rs', mono(-40)],
    ]);
    const { id } = valueOf(await create(parts));
    await measure(id);
    const { measurement } = await report(id);
    expect(measurement?.format.layout).toBe('5.1');
    // The centre alone decides: -20 dBFS in one channel is -23.0 LUFS; the LFE, 17 dB louder, weighs nothing.
    expect(measurement?.figures.loudness.integratedLufs).toBeCloseTo(-23, 0);
    expect(measurement?.findings.map(({ code }) => code)).not.toContain('layout-assumed');
  });

  it('is measured by a plan like any other', async () => {
    const { id } = valueOf(
      await create(
        await arrived([
          ['L', mono(-20)],
          ['R', mono(-20)],
        ]),
      ),
    );
    await measure(id);
    const window = { startSeconds: 1, endSeconds: 4 };
    valueOf(await setMeasuringPlan(chain.mixer, id, { plan: { ...wholeFile, window }, frameRate: null }));
    await measure(id);
    expect((await report(id)).measurement?.figures).toMatchObject({
      windowStartSeconds: 1,
      measuredSeconds: 3,
    });
  });

  it('says that its files differ in length, and which file is no sound', async () => {
    const uneven = valueOf(
      await create(
        await arrived([
          ['L', mono(-20, 5)],
          ['R', mono(-20, 4)],
        ]),
      ),
    );
    await measure(uneven.id);
    expect((await report(uneven.id)).measurement?.findings[0]).toMatchObject({
      code: 'truncated',
      message: expect.stringMatching(/differ in length, by 1\.000 s/),
    });
    const broken = valueOf(
      await create(
        await arrived([
          ['L', mono(-20)],
          ['R', new TextEncoder().encode('This is a shopping list. '.repeat(40))],
        ]),
      ),
    );
    expect(await measure(broken.id)).toMatchObject({
      kind: 'unreadable',
      reason: expect.stringMatching(/^tallow_104\.R\.wav is no WAV/),
    });
  });

  it('is not measured when one of its files is not the one that was sent', async () => {
    const parts = await arrived([['L', mono(-20)]]);
    const other = await arrivedFile(chain.mixer, mono(-20), { declared: 'a'.repeat(64) });
    const { id } = valueOf(await create([...parts, { deliverableId: other, speaker: 'R' }]));
    await measure(id);
    expect(await row(id)).toMatchObject({ state: 'unreadable', reason_code: 'hash-mismatch' });
  });

  it('comes apart when it is discarded, and can be made anew', async () => {
    const parts = await arrived([
      ['L', mono(-20)],
      ['R', mono(-20)],
    ]);
    const { id } = valueOf(await create(parts));
    await measure(id);
    valueOf(await discardDeliverable(chain.mixer, id));
    for (const { deliverableId } of parts)
      expect((await report(deliverableId)).fileName).toMatch(/^tallow_104/);
    expect(valueOf(await create(parts)).id).not.toBe(id);
  });
});

describe('what makes no set', () => {
  it('is a file that is not there, on its way, or another organisation’s', async () => {
    const [part] = await arrived([['L', mono(-20)]]);
    const [foreign] = [await arrivedFile((await makeChain(db())).mixer, mono(-20))];
    const uploading = await arrivedFile(chain.mixer, mono(-20));
    await db()('deliverables').where({ id: uploading }).update({ state: 'uploading' });
    const withPart = (deliverableId: string) => create([part, { deliverableId, speaker: 'R' }]);
    expect(codeOf(await withPart(foreign))).toBe('not_found');
    expect(refusalOf(await withPart(uploading)).message).toMatch(/still being uploaded/);
    expect((await row(part.deliverableId)).discarded_at).toBeNull();
  });

  it('is a stereo file, a set, or what was submitted by itself', async () => {
    const [part] = await arrived([['L', mono(-20)]]);
    const stereo = await arrivedFile(chain.mixer, manyTrackWave([{ dbfs: -23 }, { dbfs: -23 }], 5));
    await db()('deliverable_channels').insert({
      deliverable_id: stereo,
      organisation_id: chain.supplier.id,
      channel_id: chain.channel.id,
    });
    await measure(stereo);
    const withPart = (deliverableId: string) => create([part, { deliverableId, speaker: 'R' }]);
    expect(refusalOf(await withPart(stereo)).message).toMatch(/has 2 audio channels/);
    valueOf(
      firstOf(
        await createSubmissions(chain.mixer, [
          { deliverableId: stereo, channelId: chain.channel.id, airAt: null },
        ]),
      ),
    );
    expect(refusalOf(await withPart(stereo)).message).toMatch(/was submitted by itself/);
    const set = valueOf(
      await create(
        await arrived([
          ['L', mono(-20)],
          ['R', mono(-20)],
        ]),
      ),
    );
    expect(refusalOf(await withPart(set.id)).message).toMatch(/is a set itself/);
  });

  it('is two files for one loudspeaker, one file twice, or one alone', () => {
    const [a, b] = ['00000000-0000-4000-8000-000000000001', '00000000-0000-4000-8000-000000000002'];
    const faultOf = (parts: [string, string][]) =>
      createSetSchema.safeParse({
        name: 'x',
        parts: parts.map(([deliverableId, speaker]) => ({ deliverableId, speaker })),
      }).error?.issues[0].message;
    expect(
      faultOf([
        [a, 'L'],
        [b, 'L'],
      ]),
    ).toMatch(/same loudspeaker/);
    expect(
      faultOf([
        [a, 'L'],
        [a, 'R'],
      ]),
    ).toMatch(/twice/);
    expect(faultOf([[a, 'L']])).toMatch(/two files/);
  });

  it('is for mix engineers', async () => {
    const parts = await arrived([
      ['L', mono(-20)],
      ['R', mono(-20)],
    ]);
    const administrator = await makeMember(db(), chain.supplier, ['administrator']);
    expect(codeOf(await create(parts, administrator))).toBe('forbidden');
  });
});
