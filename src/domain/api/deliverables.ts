import { z } from 'zod';
import { speakers } from '../../engine/layouts.ts';
import { frameRateNames } from '../../engine/timecode.ts';
import {
  contentKindSchema,
  deliverableStateSchema,
  overallOutcomeSchema,
  submissionStateSchema,
} from '../vocabulary.ts';
import { excursionSchema, verdictBodySchema } from '../verdict.ts';
import { measuringPlanSchema } from '../measuring-plan.ts';
import { signalFactsSchema } from './signal-facts.ts';
import { specBodySchema } from '../spec.ts';
import { benchComparisonSchema, benchFiguresSchema } from '../bench-figures.ts';
import { idSchema, itemResultSchema, listOf, momentSchema, pageQuerySchema, personSchema } from './common.ts';

const level = z.number().nullable();
export const frameRateSchema = z.enum(frameRateNames);
export const formatSchema = z.object({
  container: z.string(),
  codec: z.string(),
  sampleRateHz: z.number(),
  bitDepth: z.number().nullable(),
  channels: z.number().int(),
  layout: z.string(),
  durationSeconds: z.number(),
  bitRateKbps: z.number().nullable().optional(),
  streams: z
    .array(
      z.object({
        codec: z.string(),
        channels: z.number().int(),
        layout: z.string(),
        language: z.string().nullable(),
        title: z.string().nullable(),
      }),
    )
    .optional(),
  startTimeReferenceSamples: z.number().optional(),
  startTimecode: z.string().optional(),
  frameRate: frameRateSchema.optional(),
  trackNames: z.array(z.string()).optional(),
  declaredLoudness: z
    .object({
      integratedLufs: level,
      rangeLu: level,
      truePeakDbtp: level,
      momentaryMaxLufs: level,
      shortTermMaxLufs: level,
    })
    .optional(),
});
export const figuresSchema = z.object({
  loudness: z.object({
    integratedLufs: level,
    relativeThresholdLufs: level,
    rangeLu: level,
    rangeLowLufs: level,
    rangeHighLufs: level,
    momentaryMaxLufs: level,
    shortTermMaxLufs: level,
    dualMonoIntegratedLufs: level.optional(),
  }),
  truePeak: z.object({
    maxDbtp: level,
    perChannelDbtp: z.array(level),
    perChannelAtSeconds: z.array(level).optional(),
  }),
  samplePeak: z.object({ maxDbfs: level, perChannelDbfs: z.array(level) }),
  times: z.object({
    momentaryMaxAtSeconds: level,
    shortTermMaxAtSeconds: level,
    truePeakMaxAtSeconds: level,
  }),
  measuredSeconds: z.number(),
  windowStartSeconds: z.number().optional(),
  downmix: z.object({ integratedLufs: level, truePeakDbtp: level }).optional(),
  signal: signalFactsSchema.optional(),
});
export const findingSchema = z.object({
  code: z.string(),
  message: z.string(),
  atSeconds: z.number().optional(),
  lengthSeconds: z.number().optional(),
  audioChannel: z.number().int().optional(),
});
export const measurementSchema = z.object({
  id: idSchema,
  engineVersion: z.string(),
  format: formatSchema,
  figures: figuresSchema,
  findings: z.array(findingSchema),
  measuringSeconds: z.number(),
  createdAt: momentSchema,
});

/** One presentation as it was measured. */
export const measuredPresentationSchema = z.object({
  /** From 1, in the plan's order. */
  position: z.number().int(),
  name: z.string(),
  /** Audio channels of the file, from 0, and the loudspeaker that each feeds; none told: all of them, in order. */
  audioChannels: z.array(z.number().int()),
  speakers: z.array(z.string()),
  measurement: measurementSchema,
  /** Its own verdict under each spec version that judges the deliverable. */
  verdicts: z.array(z.object({ specVersionId: idSchema, verdict: verdictBodySchema })),
});
export type MeasuredPresentation = z.infer<typeof measuredPresentationSchema>;

/** A deliverable's standing with one channel that it is for. */
export const channelVerdictSchema = z.object({
  channelId: idSchema,
  channelName: z.string(),
  distributorName: z.string(),
  /** `null` while nothing is measured, or where no spec is in force for this kind of content. */
  specName: z.string().nullable(),
  specVersionId: idSchema.nullable(),
  specVersionNumber: z.number().int().nullable(),
  verdictId: idSchema.nullable(),
  verdict: verdictBodySchema.nullable(),
  submission: z.object({ id: idSchema, state: submissionStateSchema, submittedAt: momentSchema }).nullable(),
});
export type ChannelVerdict = z.infer<typeof channelVerdictSchema>;

export const deliverableRowSchema = z.object({
  id: idSchema,
  fileName: z.string(),
  byteSize: z.number(),
  state: deliverableStateSchema,
  reason: z.string().nullable(),
  programmeTitle: z.string().nullable(),
  episodeLabel: z.string().nullable(),
  versionLabel: z.string(),
  contentKind: contentKindSchema,
  format: formatSchema.nullable(),
  figures: figuresSchema.nullable(),
  /** Worst first. */
  channels: z.array(channelVerdictSchema),
  /** Worst outcome over all channels; `null` while not judged. */
  outcome: overallOutcomeSchema.nullable(),
  /** Where measuring stands; `null` unless it goes on. */
  progress: z.object({ secondsDone: z.number(), secondsTotal: z.number().nullable() }).nullable(),
  createdAt: momentSchema,
});
export type DeliverableRow = z.infer<typeof deliverableRowSchema>;
export const deliverableListSchema = listOf(deliverableRowSchema);

export const deliverableSorts = [
  'created',
  'programme',
  'integrated',
  'truePeak',
  'range',
  'duration',
] as const;
export const deliverableQuerySchema = pageQuerySchema.extend({
  q: z.string().max(200).optional(),
  programme: z.string().max(200).optional(),
  channel: idSchema.optional(),
  /** Comma-separated outcomes, or 'none'. */
  verdict: z.string().max(60).optional(),
  state: z.string().max(80).optional(),
  kind: contentKindSchema.optional(),
  sort: z.enum(deliverableSorts).default('created'),
  order: z.enum(['asc', 'desc']).default('desc'),
});

/** One deliverable's report: the row, its whole verdicts with the specs' bodies, and the measurement. */
export const deliverableReportSchema = deliverableRowSchema.extend({
  sha256: z.string().nullable(),
  uploadedBy: personSchema,
  measuredAt: momentSchema.nullable(),
  /** Of the first presentation; `null` while it is not measured by the plan that holds now. */
  measurement: measurementSchema.nullable(),
  presentations: z.array(measuredPresentationSchema),
  /** The files of a set, in order; empty for what is one file. */
  parts: z.array(z.object({ speaker: z.string(), fileName: z.string(), byteSize: z.number() })),
  plan: measuringPlanSchema,
  /** Frames a second by which its times are counted, where the file tells none. */
  frameRate: frameRateSchema.nullable(),
  /** Plans that it was ever given, newest first; the whole file, which needs none, is not among them. */
  plans: z.array(
    z.object({
      plan: measuringPlanSchema,
      createdBy: personSchema.nullable(),
      createdAt: momentSchema,
      isCurrent: z.boolean(),
    }),
  ),
  /** The file as it was measured whole, or else by any plan, for choosing another one; `null` where it never was. */
  file: z
    .object({
      format: formatSchema,
      isOrderAssumed: z.boolean(),
      /** Where a line-up tone at its head ends. */
      lineUpToneEndSeconds: z.number().nullable(),
    })
    .nullable(),
  /** How it compares with what the bench measured before it was sent; `null` where no bench did. */
  bench: benchComparisonSchema.nullable(),
  specs: z.array(z.object({ specVersionId: idSchema, body: specBodySchema })),
  replaces: z.object({ id: idSchema, fileName: z.string() }).nullable(),
});
export type DeliverableReport = z.infer<typeof deliverableReportSchema>;

/** Mono files, in the order of the audio channels that they become, and the loudspeaker that each feeds. */
export const createSetSchema = z.object({
  name: z.string().trim().min(1, { error: 'Give the set a name.' }).max(200),
  parts: z
    .array(z.object({ deliverableId: idSchema, speaker: z.enum(speakers).exclude(['unknown']) }))
    .min(2, { error: 'A set is made of two files at least.' })
    .max(24, { error: 'A set is made of 24 files at the most.' })
    .refine((parts) => new Set(parts.map((p) => p.speaker)).size === parts.length, {
      error: 'Two files of the set feed the same loudspeaker.',
    })
    .refine((parts) => new Set(parts.map((p) => p.deliverableId)).size === parts.length, {
      error: 'A file stands twice in the set.',
    }),
});

/** How a deliverable is to be measured from now on. */
export const setPlanSchema = z.object({
  plan: measuringPlanSchema,
  frameRate: frameRateSchema.nullable().default(null),
});
/** 'measuring': a job was made; 'known': it was measured so before, and those figures stand now; 'same': nothing changed. */
export const setPlanResultSchema = z.object({
  deliverable: deliverableRowSchema,
  how: z.enum(['measuring', 'known', 'same']),
});

/** Details that many rows may be given at once; a title or label that does not exist yet is made. */
export const deliverableDetailsSchema = z.object({
  programmeTitle: z.string().trim().max(200).nullable().optional(),
  episodeLabel: z.string().trim().max(80).nullable().optional(),
  versionLabel: z.string().trim().max(80).optional(),
  contentKind: contentKindSchema.optional(),
  channelIds: z.array(idSchema).max(50).optional(),
});
export type DeliverableDetails = z.infer<typeof deliverableDetailsSchema>;
export const patchDeliverablesSchema = z.object({
  items: z
    .array(deliverableDetailsSchema.extend({ id: idSchema }))
    .min(1)
    .max(200),
});
export const patchDeliverablesResultSchema = z.object({
  items: z.array(itemResultSchema(deliverableRowSchema)),
});

/**
 * Loudness over time, one value per 100 ms (value i covers up to (i + 1) x 0.1 s); `null` where a window is not full or
 * there is no value. True peak in dBTP is the largest of the 100 ms. Excursions belong to the asked spec version.
 */
export const passageSchema = z.object({
  /** Where it begins in the file; its own times are counted from there. */
  windowStartSeconds: z.number().optional(),
  stepSeconds: z.number(),
  shortTermLufs: z.array(level),
  momentaryLufs: z.array(level),
  truePeakDbtp: z.array(level),
  excursions: z.array(excursionSchema),
});
export type Passage = z.infer<typeof passageSchema>;

/** The spec version whose limits the excursions are beyond: one that the deliverable was judged by. */
export const passageQuerySchema = z.object({
  specVersionId: idSchema.optional(),
  /** Place of the presentation, from 1. */
  presentation: z.coerce.number().int().min(1).default(1),
});

export const programmesSchema = z.object({
  items: z.array(z.object({ id: idSchema, title: z.string(), episodes: z.array(z.string()) })),
});

// Uploads -----------------------------------------------------------------------------------------------------

export const maximumFileBytes = 64 * 1024 ** 3;
export const createUploadsSchema = z.object({
  files: z
    .array(
      z.object({
        // Empty files and names that cannot stand are answered per file, with a sentence (domain/upload-plan.ts).
        fileName: z.string().trim().max(4000),
        byteSize: z.number().int().nonnegative(),
        lastModifiedMs: z.number().int().nonnegative(),
        details: deliverableDetailsSchema.default({}),
        /** What the bench measured of it; the service measures again and says where the two differ. */
        benchFigures: benchFiguresSchema.optional(),
      }),
    )
    .min(1)
    .max(100),
});
export const uploadSchema = z.object({
  deliverableId: idSchema,
  fileName: z.string(),
  byteSize: z.number(),
  lastModifiedMs: z.number(),
  partBytes: z.number().int(),
  partCount: z.number().int(),
  /** Numbers of the parts that storage already holds. */
  partsDone: z.array(z.number().int()),
  /** True when the same file's broken-off upload was found and goes on. */
  resumed: z.boolean(),
  createdAt: momentSchema,
});
export type Upload = z.infer<typeof uploadSchema>;
/** `id` of each item is the file's place in the request, as a string. */
export const createUploadsResultSchema = z.object({ items: z.array(itemResultSchema(uploadSchema)) });
export const uploadListSchema = z.object({ items: z.array(uploadSchema) });
export const signPartsSchema = z.object({
  numbers: z.array(z.number().int().min(1).max(10_000)).min(1).max(100),
});
export const signPartsResultSchema = z.object({
  items: z.array(z.object({ number: z.number().int(), url: z.string() })),
});
export const recordPartSchema = z.object({
  number: z.number().int().min(1).max(10_000),
  etag: z.string().min(1).max(200),
  byteSize: z.number().int().positive(),
});
export const completeUploadSchema = z.object({ sha256: z.string().regex(/^[0-9a-f]{64}$/) });
export const completeUploadResultSchema = z.object({
  deliverable: deliverableRowSchema,
  /** Another deliverable of the same organisation with the same hash, told once. */
  alreadyDelivered: z.object({ id: idSchema, fileName: z.string(), createdAt: momentSchema }).nullable(),
});
