/** What suppliers deliver: measured files, verdicts, submissions, as rows. */
import { randomBytes, randomUUID } from 'node:crypto';
import type { Knex } from 'knex';
import type { Figures, AudioFormat, Finding } from '../../src/engine/figures.ts';
import type { VerdictBody } from '../../src/domain/verdict.ts';
import type { ContentKind, SubmissionState } from '../../src/domain/vocabulary.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import type { MadeOrganisation } from './world.ts';

let counter = 0;
const nth = () => ++counter;

export const stereoFormat: AudioFormat = {
  container: 'WAV',
  codec: 'PCM',
  sampleRateHz: 48_000,
  bitDepth: 24,
  channels: 2,
  layout: 'stereo',
  durationSeconds: 90,
};

/** Figures that pass `r128Body`; name over what the test is about. */
export function figures(
  given: { integratedLufs?: number | null; maxDbtp?: number | null; rangeLu?: number | null } = {},
): Figures {
  const value = <K extends keyof typeof given>(key: K, otherwise: number) =>
    given[key] === undefined ? otherwise : given[key];
  const peak = value('maxDbtp', -3);
  const integratedLufs = value('integratedLufs', -23);
  return {
    loudness: {
      integratedLufs,
      relativeThresholdLufs: integratedLufs === null ? null : integratedLufs - 10,
      rangeLu: value('rangeLu', 9),
      rangeLowLufs: -29,
      rangeHighLufs: -20,
      momentaryMaxLufs: -16,
      shortTermMaxLufs: -18,
    },
    truePeak: { maxDbtp: peak, perChannelDbtp: [peak, peak] },
    samplePeak: {
      maxDbfs: peak === null ? null : peak - 0.2,
      perChannelDbfs: [peak, peak].map((p) => (p === null ? null : p - 0.2)),
    },
    times: { momentaryMaxAtSeconds: 12.4, shortTermMaxAtSeconds: 13, truePeakMaxAtSeconds: 12.2 },
    measuredSeconds: 90,
  };
}

export interface MadeDeliverable {
  id: string;
  presentationId: string;
  measurementId: string;
  sha256: string;
  fileName: string;
}

/** A measured deliverable of a member's organisation, for these channels; not judged yet. */
export async function makeDeliverable(
  db: Knex,
  by: MemberScope,
  given: {
    fileName?: string;
    figures?: Figures;
    format?: AudioFormat;
    findings?: Finding[];
    channelIds?: readonly string[];
    contentKind?: ContentKind;
    programmeTitle?: string;
    episodeLabel?: string;
    sha256?: string;
    seriesKey?: string;
  } = {},
): Promise<MadeDeliverable> {
  const organisation_id = by.organisationId;
  const sha256 = given.sha256 ?? randomBytes(32).toString('hex');
  const fileName = given.fileName ?? `mix_${nth()}.wav`;
  const programme_id = given.programmeTitle
    ? (
        await db('programmes')
          .insert({ organisation_id, title: given.programmeTitle })
          .onConflict(db.raw('(organisation_id, lower(title))'))
          .merge(['title'])
          .returning('id')
      )[0].id
    : null;
  const episode_id =
    programme_id && given.episodeLabel
      ? (
          await db('episodes')
            .insert({ organisation_id, programme_id, label: given.episodeLabel })
            .onConflict(db.raw('(programme_id, lower(label))'))
            .merge(['label'])
            .returning('id')
        )[0].id
      : null;
  const [deliverable] = await db('deliverables')
    .insert({
      organisation_id,
      uploaded_by: by.userId,
      file_name: fileName,
      byte_size: 25_920_044,
      storage_key: `originals/${randomUUID()}`,
      sha256_declared: sha256,
      sha256,
      state: 'measured',
      programme_id,
      episode_id,
      content_kind: given.contentKind ?? 'long_form',
      uploaded_at: db.fn.now(),
      measured_at: db.fn.now(),
    })
    .returning('id');
  const [presentation] = await db('presentations')
    .insert({
      organisation_id,
      deliverable_id: deliverable.id,
      name: 'Full mix',
      layout: (given.format ?? stereoFormat).layout,
    })
    .returning('id');
  const [measurement] = await db('measurements')
    .insert({
      organisation_id,
      deliverable_id: deliverable.id,
      presentation_id: presentation.id,
      engine_version: '1.0.0',
      parameters_hash: 'whole file',
      sha256,
      format: JSON.stringify(given.format ?? stereoFormat),
      figures: JSON.stringify(given.figures ?? figures()),
      findings: JSON.stringify(given.findings ?? []),
      series_key: given.seriesKey ?? `series/${randomUUID()}`,
      measuring_seconds: 1.5,
    })
    .returning('id');
  if (given.channelIds?.length) {
    await db('deliverable_channels').insert(
      given.channelIds.map((channel_id) => ({ organisation_id, deliverable_id: deliverable.id, channel_id })),
    );
  }
  return {
    id: deliverable.id,
    presentationId: presentation.id,
    measurementId: measurement.id,
    sha256,
    fileName,
  };
}

/** A verdict as the caller words it (the judge's own work is tested with the judge), made the row's verdict for a channel. */
export async function makeVerdict(
  db: Knex,
  by: MemberScope,
  deliverable: MadeDeliverable,
  specVersionId: string,
  given: { outcome?: VerdictBody['outcome']; body?: VerdictBody; channelId?: string } = {},
): Promise<string> {
  const outcome = given.outcome ?? 'pass';
  const body: VerdictBody = given.body ?? {
    outcome,
    rounding: 'shown',
    rules: [],
    nearestRuleId: null,
    nearestText: 'integrated 0.5 LU inside',
  };
  const [row] = await db('verdicts')
    .insert({
      organisation_id: by.organisationId,
      measurement_id: deliverable.measurementId,
      spec_version_id: specVersionId,
      outcome,
      body: JSON.stringify(body),
    })
    .onConflict(['measurement_id', 'spec_version_id'])
    .ignore()
    .returning('id');
  const id: string =
    row?.id ??
    (
      await db('verdicts')
        .where({ measurement_id: deliverable.measurementId, spec_version_id: specVersionId })
        .first('id')
    ).id;
  if (given.channelId) {
    await db('deliverable_channels')
      .where({ deliverable_id: deliverable.id, channel_id: given.channelId })
      .update({ verdict_id: id });
  }
  return id;
}

/** A submission awaiting review, or one that was decided when `state` and `decidedBy` say so. */
export async function makeSubmission(
  db: Knex,
  by: MemberScope,
  deliverable: MadeDeliverable,
  to: { distributor: MadeOrganisation; channel: { id: string }; specVersionId: string; verdictId: string },
  given: {
    state?: SubmissionState;
    decidedBy?: string;
    decidedAt?: Date;
    reason?: string;
    airAt?: Date | null;
    submittedAt?: Date;
  } = {},
): Promise<string> {
  const [row] = await db('submissions')
    .insert({
      organisation_id: by.organisationId,
      distributor_id: to.distributor.id,
      channel_id: to.channel.id,
      deliverable_id: deliverable.id,
      measurement_id: deliverable.measurementId,
      spec_version_id: to.specVersionId,
      verdict_id: to.verdictId,
      sha256: deliverable.sha256,
      state: given.state ?? 'awaiting_review',
      air_at: given.airAt ?? null,
      submitted_by: by.userId,
      submitted_at: given.submittedAt ?? db.fn.now(),
      decided_by: given.decidedBy ?? null,
      decided_at: given.decidedBy ? (given.decidedAt ?? db.fn.now()) : null,
      decision_reason: given.reason ?? null,
    })
    .returning('id');
  await db('submission_measurements').insert({
    submission_id: row.id,
    organisation_id: by.organisationId,
    position: 1,
    name: 'Full mix',
    measurement_id: deliverable.measurementId,
    verdict_id: to.verdictId,
  });
  return row.id;
}
