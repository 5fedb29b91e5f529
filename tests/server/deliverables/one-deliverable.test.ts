import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  deliverableReportSchema,
  passageSchema,
  patchDeliverablesResultSchema,
} from '../../../src/domain/api/deliverables.ts';
import { specBodySchema } from '../../../src/domain/spec.ts';
import { encodeSeries } from '../../../src/engine/series.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import {
  discardDeliverable,
  getDeliverableReport,
  patchDeliverables,
} from '../../../src/server/services/deliverables.ts';
import { getDeliverableAudio, getDeliverablePassage } from '../../../src/server/services/passages.ts';
import { closeStorage, putObject } from '../../../src/server/storage/storage.ts';
import {
  figures,
  makeAgreement,
  makeAssignment,
  makeChain,
  makeChannel,
  makeDeliverable,
  makeMember,
  makeSpecVersion,
  makeSubmission,
  makeVerdict,
  openWorld,
  r128Body,
  stereoFormat,
  type World,
} from '../../factories/world.ts';
import { codeOf, refusalOf, valueOf } from '../answers.ts';

let world: World;
let chain: Awaited<ReturnType<typeof makeChain>>;
let stranger: MemberScope;
beforeAll(async () => {
  world = await openWorld({ S3_BUCKET: `test-${randomUUID().slice(0, 8)}` });
  chain = await makeChain(world.db);
  stranger = (await makeChain(world.db)).mixer;
});
afterAll(async () => {
  closeStorage();
  await world.close();
});

/** Five seconds at a steady level with one over of true peak in the third second. */
const series = {
  stepSeconds: 0.01 as const,
  energy: Float64Array.from({ length: 500 }, () => 0.01),
  truePeak: Float32Array.from({ length: 500 }, (_, i) => (i === 234 ? 1.2 : 0.25)),
  channelCount: 2,
  channelEnergy: new Float32Array(100).fill(0.005),
};
async function makeJudged(scope = chain.mixer, given: Parameters<typeof makeDeliverable>[2] = {}) {
  const made = await makeDeliverable(world.db, scope, { channelIds: [chain.channel.id], ...given });
  const verdictId = await makeVerdict(world.db, scope, made, chain.spec.id, { channelId: chain.channel.id });
  return { ...made, verdictId };
}
const keyOf = async (id: string): Promise<{ storage_key: string; series_key: string }> =>
  world
    .db('deliverables as d')
    .join('measurements as m', 'm.deliverable_id', 'd.id')
    .where('d.id', id)
    .first('d.storage_key', 'm.series_key');

describe('the report of a deliverable', () => {
  it('carries the measurement, the specs that judge it, who uploaded it and what it replaces', async () => {
    const first = await makeJudged();
    const made = await makeJudged();
    await world.db('deliverables').where('id', made.id).update({ replaces_id: first.id });
    const report = deliverableReportSchema.parse(valueOf(await getDeliverableReport(chain.mixer, made.id)));
    expect(report).toMatchObject({
      sha256: made.sha256,
      uploadedBy: { id: chain.mixer.userId, name: chain.mixer.userName },
      measurement: {
        id: made.measurementId,
        engineVersion: '1.0.0',
        figures: figures(),
        format: stereoFormat,
      },
      specs: [{ specVersionId: chain.spec.id, body: r128Body }],
      replaces: { id: first.id, fileName: first.fileName },
    });
  });

  it('is there before anything is measured, and says why something could not be', async () => {
    const { id } = await makeDeliverable(world.db, chain.mixer);
    await world
      .db('deliverables')
      .where({ id })
      .update({ state: 'unreadable', reason_code: 'not-audio', reason: 'This is a text file.' });
    expect(valueOf(await getDeliverableReport(chain.mixer, id))).toMatchObject({
      state: 'unreadable',
      reason: 'This is a text file.',
    });
  });

  it('is not there for another organisation', async () => {
    const { id } = await makeJudged();
    for (const answer of [
      await getDeliverableReport(stranger, id),
      await getDeliverablePassage(stranger, id, chain.spec.id),
      await getDeliverableAudio(stranger, id),
      await discardDeliverable(stranger, id),
    ])
      expect(codeOf(answer)).toBe('not_found');
    expect(codeOf(await getDeliverableReport(chain.operator, id))).toBe('forbidden');
  });
});

describe('details of many', () => {
  it('are set item by item, and a foreign item fails alone', async () => {
    const [one, two] = [await makeJudged(), await makeJudged()];
    const theirs = await makeDeliverable(world.db, stranger);
    const { items } = patchDeliverablesResultSchema.parse(
      valueOf(
        await patchDeliverables(chain.mixer, [
          { id: one.id, programmeTitle: 'Small Gales', episodeLabel: '2.11' },
          { id: theirs.id, programmeTitle: 'Small Gales' },
          { id: two.id, programmeTitle: 'small gales', versionLabel: 'v3' },
        ]),
      ),
    );
    expect(items.map((item) => [item.id, item.ok])).toEqual([
      [one.id, true],
      [theirs.id, false],
      [two.id, true],
    ]);
    expect(items[0]).toMatchObject({ value: { programmeTitle: 'Small Gales', episodeLabel: '2.11' } });
    expect(items[1]).toMatchObject({ error: { code: 'not_found' } });
    expect(items[2]).toMatchObject({ value: { programmeTitle: 'Small Gales', versionLabel: 'v3' } });
    expect((await world.db('deliverables').where('id', theirs.id).first()).programme_id).toBeNull();
    expect(await world.db('audit_events').where('subject_id', one.id).pluck('action')).toEqual([
      'deliverable.details_changed',
    ]);
  });

  it('judge anew when the kind of content changes, without a second measurement', async () => {
    const { db } = world;
    const strict = await makeSpecVersion(db, chain.distributor, {
      body: specBodySchema.parse({ ...r128Body, rules: [{ ...r128Body.rules[0], targetLufs: -16 }] }),
    });
    const channel = await makeChannel(db, chain.distributor);
    await makeAgreement(db, chain.distributor, channel, chain.supplier);
    await makeAssignment(db, chain.distributor, channel, chain.spec.specId);
    await makeAssignment(db, chain.distributor, channel, strict.specId, { contentKind: 'podcast_episode' });
    const { id } = await makeDeliverable(db, chain.mixer);
    const patch = async (details: { contentKind?: 'podcast_episode'; channelIds?: string[] }) =>
      valueOf(await patchDeliverables(chain.mixer, [{ id, ...details }])).items[0];
    expect(await patch({ channelIds: [channel.id] })).toMatchObject({
      value: { outcome: 'pass', channels: [{ specVersionId: chain.spec.id }] },
    });
    expect(await patch({ contentKind: 'podcast_episode' })).toMatchObject({
      value: { outcome: 'fail', channels: [{ specVersionId: strict.id }] },
    });
    expect(await db('measurements').where('deliverable_id', id).pluck('id')).toHaveLength(1);
  });

  it('are for mix engineers only', async () => {
    const { id } = await makeJudged();
    const administrator = await makeMember(world.db, chain.supplier, ['administrator']);
    expect(codeOf(await patchDeliverables(administrator, [{ id, versionLabel: 'v9' }]))).toBe('forbidden');
    expect(codeOf(await discardDeliverable(administrator, id))).toBe('forbidden');
  });
});

describe('discarding', () => {
  it('takes what was never submitted out of sight, and says so in the audit', async () => {
    const { id } = await makeJudged();
    expect(valueOf(await discardDeliverable(chain.mixer, id))).toEqual({ id });
    expect(codeOf(await getDeliverableReport(chain.mixer, id))).toBe('not_found');
    expect(codeOf(await discardDeliverable(chain.mixer, id))).toBe('not_found');
    expect(await world.db('audit_events').where('subject_id', id).pluck('action')).toEqual([
      'deliverable.discarded',
    ]);
  });

  it('is refused once something was submitted, even when that was withdrawn', async () => {
    const made = await makeJudged();
    await makeSubmission(
      world.db,
      chain.mixer,
      made,
      { ...chain, specVersionId: chain.spec.id, verdictId: made.verdictId },
      { state: 'withdrawn' },
    );
    const refusal = refusalOf(await discardDeliverable(chain.mixer, made.id));
    expect(refusal).toMatchObject({ code: 'conflict', message: expect.stringContaining(chain.channel.name) });
    expect(codeOf(await getDeliverableReport(chain.mixer, made.id))).toBe('ok');
  });

  it('is refused while the file is on its way up', async () => {
    const { id } = await makeJudged();
    await world.db('deliverables').where({ id }).update({ state: 'uploading' });
    expect(codeOf(await discardDeliverable(chain.mixer, id))).toBe('conflict');
    expect(codeOf(await getDeliverableAudio(chain.mixer, id))).toBe('conflict');
  });
});

describe('what a report draws and plays', () => {
  it('draws loudness over time from the stored series, with the excursions of the asked spec', async () => {
    const { id } = await makeJudged();
    await putObject((await keyOf(id)).series_key, encodeSeries(series));
    const passage = passageSchema.parse(valueOf(await getDeliverablePassage(chain.mixer, id, chain.spec.id)));
    expect(passage.shortTermLufs).toHaveLength(50);
    expect(passage.shortTermLufs[28]).toBeNull();
    // -0.691 + 10 lg 0.01 (ITU-R BS.1770-5 Annex 1), in hundredths.
    expect(passage.shortTermLufs[29]).toBe(-20.69);
    expect(passage.truePeakDbtp[23]).toBe(1.58);
    expect(passage.excursions).toMatchObject([{ ruleId: 'true-peak' }]);
    expect(passage.excursions[0].startSeconds).toBeCloseTo(2.3, 6);
    expect(valueOf(await getDeliverablePassage(chain.mixer, id)).excursions).toEqual([]);
  });

  it('draws no excursions of a spec that the deliverable was not judged by', async () => {
    const { id } = await makeJudged();
    await putObject((await keyOf(id)).series_key, encodeSeries(series));
    const foreign = await makeChain(world.db);
    expect(codeOf(await getDeliverablePassage(chain.mixer, id, foreign.spec.id))).toBe('not_found');
  });

  it('says that the curve is gone when storage has lost it, and the report stands', async () => {
    const { id } = await makeJudged();
    expect(codeOf(await getDeliverablePassage(chain.mixer, id))).toBe('gone');
    expect(codeOf(await getDeliverableReport(chain.mixer, id))).toBe('ok');
  });

  it('leads to the original, to be played in place under its own name', async () => {
    const made = await makeJudged(chain.mixer, { fileName: 'Small Gales 2.11 “final”.wav' });
    await putObject((await keyOf(made.id)).storage_key, Buffer.from('RIFF and so on'));
    const { url } = valueOf(await getDeliverableAudio(chain.mixer, made.id));
    const answer = await fetch(url, { headers: { range: 'bytes=0-3' } });
    expect(answer.status).toBe(206);
    expect(await answer.text()).toBe('RIFF');
    expect(answer.headers.get('content-type')).toBe('audio/wav');
    expect(answer.headers.get('content-disposition')).toMatch(
      /^inline; filename\*=UTF-8''Small%20Gales%202\.11/,
    );
  });
});
