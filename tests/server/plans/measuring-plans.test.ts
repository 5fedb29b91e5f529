// How a deliverable is measured, from the request to the verdicts, through the real measuring.
import { tmpdir } from 'node:os';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { deliverableReportSchema, setPlanResultSchema } from '../../../src/domain/api/deliverables.ts';
import { submissionReportSchema } from '../../../src/domain/api/submissions.ts';
import { wholeFile, type MeasuringPlan, type Presentation } from '../../../src/engine/plan.ts';
import type { FrameRateName } from '../../../src/engine/timecode.ts';
import { db } from '../../../src/server/db/connection.ts';
import type { MeasureElsewhere } from '../../../src/server/queue/measuring-contract.ts';
import { hasLiveJob } from '../../../src/server/queue/measuring-queue.ts';
import { decideSubmissions } from '../../../src/server/services/decisions.ts';
import { getDeliverableReport, listDeliverables } from '../../../src/server/services/deliverables.ts';
import { measureObject } from '../../../src/server/services/measure-object.ts';
import { measureDeliverable } from '../../../src/server/services/measuring.ts';
import { setMeasuringPlan } from '../../../src/server/services/measuring-plans.ts';
import { getDeliverablePassage, getSubmissionPassage } from '../../../src/server/services/passages.ts';
import { createSubmissions, getSubmissionReport } from '../../../src/server/services/submissions.ts';
import { deliverableQuerySchema } from '../../../src/domain/api/deliverables.ts';
import { makeChain, makeMember } from '../../factories/world.ts';
import { arrivedFile } from '../arrived-file.ts';
import { codeOf, firstOf, refusalOf, valueOf } from '../answers.ts';
import { manyTrackWave } from '../many-track-file.ts';
import { openServiceWorld } from '../service-world.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let chain: Awaited<ReturnType<typeof makeChain>>;
beforeAll(async () => {
  world = await openServiceWorld(9);
  chain = await makeChain(db());
});
afterAll(() => world.close());

// A 1 kHz sine of x dBFS peak in L and R stands at x LUFS (BS.1770-5 Annex 1: 997 Hz at 0 dBFS in one channel, -3.01 LUFS).
// Ten seconds of line-up tone at -18, then programme at -23; the second pair is 6 dB louder.
const wave = manyTrackWave(
  [{ dbfs: -23 }, { dbfs: -23 }, { dbfs: -17 }, { dbfs: -17, from: 4 }, { dbfs: -70 }, { dbfs: -70 }],
  12,
);
const here: MeasureElsewhere = (task, options) =>
  measureObject(task, { ...options, onRead: () => {}, scratchDir: tmpdir() });
const measure = (id: string) => measureDeliverable(id, here, new AbortController().signal);

async function measuredFile(): Promise<string> {
  const id = await arrivedFile(chain.mixer, wave, { fileName: 'tallow_104_stems.wav' });
  await db()('deliverable_channels').insert({
    deliverable_id: id,
    organisation_id: chain.supplier.id,
    channel_id: chain.channel.id,
  });
  await measure(id);
  return id;
}
const pair = (name: string, first: number): Presentation => ({
  name,
  audioChannels: [first, first + 1],
  speakers: ['L', 'R'],
});
const twoPairs: MeasuringPlan = { ...wholeFile, presentations: [pair('Full mix', 0), pair('M&E', 2)] };
const fromFour: MeasuringPlan = {
  ...wholeFile,
  window: { startSeconds: 4, endSeconds: 10 },
  presentations: [pair('M&E', 2)],
};
const put = (id: string, plan: MeasuringPlan, frameRate: FrameRateName | null = null, scope = chain.mixer) =>
  setMeasuringPlan(scope, id, { plan, frameRate });
const report = async (id: string) =>
  deliverableReportSchema.parse(valueOf(await getDeliverableReport(chain.mixer, id)));
const measurements = (id: string) => db()('measurements').where('deliverable_id', id);

describe('a measuring plan', () => {
  it('has every presentation measured and judged by itself, and the worst stands for all', async () => {
    const id = await measuredFile();
    const before = await report(id);
    expect(before).toMatchObject({ plan: wholeFile, plans: [], presentations: [{ name: '5.1' }] });
    expect(before.measurement?.findings.map(({ code }) => code)).toContain('layout-assumed');

    const set = setPlanResultSchema.parse(valueOf(await put(id, twoPairs)));
    expect(set).toMatchObject({ how: 'measuring', deliverable: { state: 'waiting', outcome: null } });
    expect(await hasLiveJob(id)).toBe(true);
    expect(await report(id)).toMatchObject({
      measurement: null,
      presentations: [],
      file: { format: { channels: 6 }, isOrderAssumed: true },
    });

    expect(await measure(id)).toEqual({ kind: 'measured' });
    const after = await report(id);
    expect(after.plan).toEqual(twoPairs);
    expect(after.presentations.map(({ name, audioChannels }) => [name, audioChannels])).toEqual([
      ['Full mix', [0, 1]],
      ['M&E', [2, 3]],
    ]);
    const [full, effects] = after.presentations;
    expect(full.measurement.figures.loudness.integratedLufs).toBeCloseTo(-23, 1);
    expect(full.measurement.format).toMatchObject({ channels: 6, layout: 'stereo' });
    expect(full.measurement.findings.map(({ code }) => code)).not.toContain('layout-assumed');
    expect(full.verdicts).toMatchObject([{ specVersionId: chain.spec.id, verdict: { outcome: 'pass' } }]);
    expect(effects.verdicts).toMatchObject([{ verdict: { outcome: 'fail' } }]);
    expect(after.channels[0].verdict).toMatchObject({
      outcome: 'fail',
      nearestText: expect.stringMatching(/^integrated \d\.\d LU over in M&E$/),
    });
    // The list agrees: its figures are the first presentation's, its verdict is over all.
    const list = valueOf(
      await listDeliverables(chain.mixer, deliverableQuerySchema.parse({ verdict: 'fail', q: 'stems' })),
    );
    const row = list.items.find((one) => one.id === id);
    expect(row?.figures).toEqual(full.measurement.figures);
    expect(row?.outcome).toBe('fail');
  });

  it('measures a window, with times counted from its start', async () => {
    const id = await measuredFile();
    valueOf(await put(id, fromFour, '25'));
    await measure(id);
    const { measurement, frameRate } = await report(id);
    expect(frameRate).toBe('25');
    expect(measurement?.figures).toMatchObject({ windowStartSeconds: 4, measuredSeconds: 6 });
    // Before 4 s its right side is silent: both sides at -17 dBFS stand at -17.0 LUFS.
    expect(measurement?.figures.loudness.integratedLufs).toBeCloseTo(-17, 1);
    expect(measurement?.format.durationSeconds).toBe(12);
    const passage = valueOf(await getDeliverablePassage(chain.mixer, id, chain.spec.id));
    expect(passage.windowStartSeconds).toBe(4);
    expect(passage.truePeakDbtp).toHaveLength(60);
  });

  it('is offered the end of a line-up tone, and offers it still when it is left out', async () => {
    const id = await arrivedFile(
      chain.mixer,
      manyTrackWave(
        [
          { dbfs: -18, to: 3 },
          { dbfs: -18, to: 3 },
        ],
        6,
      ),
    );
    await measure(id);
    expect((await report(id)).file?.lineUpToneEndSeconds).toBeCloseTo(3, 0);
    valueOf(await put(id, { ...wholeFile, window: { startSeconds: 3.1, endSeconds: null } }));
    await measure(id);
    const { file, measurement } = await report(id);
    expect(measurement?.findings.map(({ code }) => code)).not.toContain('line-up-tone');
    expect(file?.lineUpToneEndSeconds).toBeCloseTo(3, 0);
  });

  it('keeps every measurement, and finds it again when an earlier plan is set anew', async () => {
    const id = await measuredFile();
    valueOf(await put(id, twoPairs));
    await measure(id);
    expect(await measurements(id)).toHaveLength(3);
    const back = valueOf(await put(id, wholeFile));
    expect(back).toMatchObject({ how: 'known', deliverable: { state: 'measured' } });
    expect(back.deliverable.channels[0].verdict?.outcome).toBeDefined();
    expect((await report(id)).presentations).toHaveLength(1);
    const again = valueOf(await put(id, twoPairs));
    expect(again).toMatchObject({ how: 'known', deliverable: { outcome: 'fail' } });
    expect(valueOf(await put(id, twoPairs)).how).toBe('same');
    expect(await measurements(id)).toHaveLength(3);
    const { plans } = await report(id);
    expect(plans).toMatchObject([{ plan: twoPairs, isCurrent: true, createdBy: { id: chain.mixer.userId } }]);
  });

  it('is measured again by a newer engine, though the plan is the same', async () => {
    const id = await measuredFile();
    // As if an older engine had measured it: rows are never changed, so a copy of other make stands alone.
    const other = await arrivedFile(chain.mixer, wave);
    const [made] = await measurements(id);
    const [presentation] = await db()('presentations')
      .insert({ organisation_id: chain.supplier.id, deliverable_id: other, position: 1, name: '5.1' })
      .returning('id');
    const { id: _, created_at: __, ...kept } = made;
    await db()('measurements').insert({
      ...kept,
      deliverable_id: other,
      presentation_id: presentation.id,
      engine_version: '1.0.0',
      format: JSON.stringify(made.format),
      figures: JSON.stringify(made.figures),
      findings: JSON.stringify(made.findings),
    });
    await db()('deliverables').where({ id: other }).update({ state: 'measured' });
    expect(valueOf(await put(other, wholeFile)).how).toBe('measuring');
  });

  it('is written down in the audit in words', async () => {
    const id = await measuredFile();
    valueOf(await put(id, fromFour));
    const [event] = await db()('audit_events').where({ subject_id: id, action: 'deliverable.plan_changed' });
    expect(event).toMatchObject({
      actor_id: chain.mixer.userId,
      detail: { plan: 'from 00:00:04.000 to 00:00:10.000, as M&E (L R)' },
    });
  });
});

describe('a plan that cannot be', () => {
  it.each([
    [
      'an audio channel that the file has not',
      { presentations: [pair('Far', 6)] },
      /has 6 audio channels; number 7/,
    ],
    ['a start behind the end', { window: { startSeconds: 12, endSeconds: null } }, /lasts 12\.000 s/],
    ['an end behind the end', { window: { startSeconds: 0, endSeconds: 13 } }, /cannot end at 13\.000 s/],
    ['a stream that the file has not', { stream: 1 }, /one audio stream/],
  ])('names %s', async (_what, part, sentence) => {
    const id = await measuredFile();
    const refusal = refusalOf(await put(id, { ...wholeFile, ...part } as MeasuringPlan));
    expect(refusal).toMatchObject({ code: 'bad_input', message: expect.stringMatching(sentence) });
    expect((await report(id)).plan).toEqual(wholeFile);
  });

  it('waits while the file is on its way', async () => {
    const id = await arrivedFile(chain.mixer, wave);
    expect(refusalOf(await put(id, twoPairs)).message).toMatch(/waits to be measured/);
  });

  it('may be another one where the first left nothing to measure', async () => {
    const id = await arrivedFile(
      chain.mixer,
      new TextEncoder().encode('This is a shopping list. '.repeat(40)),
    );
    await measure(id);
    expect(valueOf(await put(id, { ...wholeFile, stream: 1 })).how).toBe('measuring');
    await db()('deliverables')
      .where({ id })
      .update({ state: 'unreadable', reason: 'It is gone.', reason_code: 'missing' });
    expect(refusalOf(await put(id, wholeFile))).toMatchObject({ code: 'conflict', message: 'It is gone.' });
  });

  it('is for mix engineers of the same organisation', async () => {
    const id = await measuredFile();
    const administrator = await makeMember(db(), chain.supplier, ['administrator']);
    const stranger = (await makeChain(db())).mixer;
    expect(codeOf(await put(id, twoPairs, null, administrator))).toBe('forbidden');
    expect(codeOf(await put(id, twoPairs, null, stranger))).toBe('not_found');
  });

  it('does not end a run that another plan has overtaken', async () => {
    const id = await measuredFile();
    valueOf(await put(id, twoPairs));
    await measureDeliverable(
      id,
      async (task, options) => {
        const outcome = await here(task, options);
        // A worker that was taken for dead, and comes back after somebody else has measured and a person has changed the plan.
        await db()('deliverables').where({ id }).update({ state: 'waiting', plan_id: null });
        return outcome;
      },
      new AbortController().signal,
    );
    expect(await db()('deliverables').where({ id }).first('state')).toEqual({ state: 'waiting' });
  });
});

describe('a submission of several presentations', () => {
  const submit = async (id: string) =>
    valueOf(
      firstOf(
        await createSubmissions(chain.mixer, [
          { deliverableId: id, channelId: chain.channel.id, airAt: null },
        ]),
      ),
    );

  it('freezes each of them, shows them to QC, and stops the plan from changing', async () => {
    const id = await measuredFile();
    valueOf(await put(id, twoPairs));
    await measure(id);
    const row = await submit(id);
    expect(row.verdict).toMatchObject({ outcome: 'fail', nearestText: expect.stringMatching(/ in M&E$/) });
    expect(refusalOf(await put(id, wholeFile)).message).toMatch(/Withdraw it first/);
    const read = submissionReportSchema.parse(valueOf(await getSubmissionReport(chain.operator, row.id)));
    expect(read.presentations.map(({ name, verdict }) => [name, verdict.outcome])).toEqual([
      ['Full mix', 'pass'],
      ['M&E', 'fail'],
    ]);
    expect(read.figures).toEqual(read.presentations[0].measurement.figures);
    const [first, second] = [
      valueOf(await getSubmissionPassage(chain.operator, row.id)),
      valueOf(await getSubmissionPassage(chain.operator, row.id, 2)),
    ];
    expect(second.shortTermLufs.at(-1)).toBeGreaterThan((first.shortTermLufs.at(-1) ?? 0) + 5);
    expect(codeOf(await getSubmissionPassage(chain.operator, row.id, 3))).toBe('not_found');
  });

  it('is not approved as clean though its first presentation passes', async () => {
    const id = await measuredFile();
    valueOf(await put(id, twoPairs));
    await measure(id);
    const { id: submission, version } = await submit(id);
    const decide = async (decision: Parameters<typeof decideSubmissions>[1][number]) =>
      firstOf(await decideSubmissions(chain.operator, [decision]));
    expect(codeOf(await decide({ id: submission, version, decision: 'approve' }))).not.toBe('ok');
    const waived = await decide({
      id: submission,
      version,
      decision: 'approve_with_waiver',
      waivers: [{ ruleId: 'integrated', reason: 'Agreed by telephone.' }],
    });
    expect(valueOf(waived).state).toBe('approved_with_waiver');
    expect(refusalOf(await put(id, wholeFile)).message).toMatch(/approved/);
  });
});
