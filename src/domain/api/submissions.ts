import { z } from 'zod';
import { contentKindSchema, overallOutcomeSchema, submissionStateSchema } from '../vocabulary.ts';
import { specBodySchema } from '../spec.ts';
import { verdictBodySchema } from '../verdict.ts';
import {
  figuresSchema,
  formatSchema,
  frameRateSchema,
  measuredPresentationSchema,
  measurementSchema,
  passageQuerySchema,
} from './deliverables.ts';
import {
  idSchema,
  itemResultSchema,
  listOf,
  momentSchema,
  organisationRefSchema,
  pageQuerySchema,
  personSchema,
} from './common.ts';

export const submissionRowSchema = z.object({
  id: idSchema,
  state: submissionStateSchema,
  version: z.number().int(),
  deliverableId: idSchema,
  fileName: z.string(),
  programmeTitle: z.string().nullable(),
  episodeLabel: z.string().nullable(),
  versionLabel: z.string(),
  contentKind: contentKindSchema,
  supplier: organisationRefSchema,
  distributor: organisationRefSchema,
  channel: z.object({ id: idSchema, name: z.string(), timeZone: z.string() }),
  specName: z.string(),
  specVersionNumber: z.number().int(),
  format: formatSchema,
  figures: figuresSchema,
  verdict: verdictBodySchema,
  airAt: momentSchema.nullable(),
  submittedAt: momentSchema,
  submittedBy: personSchema,
  decidedBy: personSchema.nullable(),
  decidedAt: momentSchema.nullable(),
  decisionReason: z.string().nullable(),
  failingRuleIds: z.array(z.string()),
  /** Until when the decision can still be taken back; `null` when it cannot. */
  takeBackUntil: momentSchema.nullable(),
  /** People who have this row open just now, without the caller. */
  openBy: z.array(personSchema),
  /** The caller uploaded it and so may not decide on it. */
  ownUpload: z.boolean(),
});
export type SubmissionRow = z.infer<typeof submissionRowSchema>;
export const submissionListSchema = listOf(submissionRowSchema).extend({
  /** For the head of the queue, over the whole filter. */
  counts: z.object({ awaiting: z.number().int(), airingWithin24h: z.number().int() }),
});

export const submissionSorts = ['submitted', 'airs', 'programme', 'integrated', 'truePeak'] as const;
export const submissionQuerySchema = pageQuerySchema.extend({
  q: z.string().max(200).optional(),
  /** Comma-separated states; the queue asks for 'awaiting_review'. */
  state: z.string().max(120).optional(),
  verdict: z.string().max(60).optional(),
  channel: idSchema.optional(),
  supplier: idSchema.optional(),
  sort: z.enum(submissionSorts).default('airs'),
  order: z.enum(['asc', 'desc']).default('asc'),
});

export const submissionReportSchema = submissionRowSchema.extend({
  sha256: z.string(),
  /** Of the first presentation. */
  measurement: measurementSchema,
  /** Each presentation as it was frozen, with its own verdict; `verdict` of the row is over all of them. */
  presentations: z.array(
    measuredPresentationSchema.omit({ verdicts: true }).extend({ verdict: verdictBodySchema }),
  ),
  /** Frames a second by which its times are counted, where the file tells none. */
  frameRate: frameRateSchema.nullable(),
  /** Several mono files, which cannot be played as one. */
  isSet: z.boolean(),
  specBody: specBodySchema,
  specVersionId: idSchema,
  /** Verdict under the version now in force, where that is another one. */
  underNewer: z
    .object({ specVersionNumber: z.number().int(), outcome: overallOutcomeSchema, nearestText: z.string() })
    .nullable(),
  notes: z.array(
    z.object({
      id: idSchema,
      author: personSchema,
      organisationName: z.string(),
      atSeconds: z.number().nullable(),
      text: z.string(),
      createdAt: momentSchema,
    }),
  ),
  waivers: z.array(
    z.object({ ruleId: z.string(), reason: z.string(), waivedBy: personSchema, createdAt: momentSchema }),
  ),
  /** The submission that this one replaces, with its figures, for the change figure by figure. */
  replaces: z
    .object({
      id: idSchema,
      submittedAt: momentSchema,
      figures: figuresSchema,
      outcome: overallOutcomeSchema,
    })
    .nullable(),
});
export type SubmissionReport = z.infer<typeof submissionReportSchema>;

export const submissionPassageQuerySchema = passageQuerySchema.pick({ presentation: true });

export const createSubmissionsSchema = z.object({
  items: z
    .array(
      z.object({
        deliverableId: idSchema,
        channelId: idSchema,
        airAt: momentSchema.nullable().default(null),
      }),
    )
    .min(1)
    .max(200),
});
/** `id` of each item is '<deliverableId>/<channelId>'. */
export const createSubmissionsResultSchema = z.object({
  items: z.array(itemResultSchema(submissionRowSchema)),
});
export const patchSubmissionSchema = z.object({ airAt: momentSchema.nullable() });

export const decisionSchema = z.discriminatedUnion('decision', [
  z.object({ id: idSchema, version: z.number().int(), decision: z.literal('approve') }),
  z.object({
    id: idSchema,
    version: z.number().int(),
    decision: z.literal('reject'),
    reason: z.string().trim().min(1, 'Give a reason that the supplier can act on.').max(2000),
    failingRuleIds: z.array(z.string()).max(40).default([]),
  }),
  z.object({
    id: idSchema,
    version: z.number().int(),
    decision: z.literal('approve_with_waiver'),
    waivers: z
      .array(
        z.object({
          ruleId: z.string(),
          reason: z.string().trim().min(1, 'Say why this rule is waived.').max(2000),
        }),
      )
      .min(1)
      .max(40),
  }),
]);
export const decisionsSchema = z.object({ items: z.array(decisionSchema).min(1).max(200) });
export const decisionsResultSchema = z.object({ items: z.array(itemResultSchema(submissionRowSchema)) });
export const noteSchema = z.object({
  text: z.string().trim().min(1).max(4000),
  atSeconds: z.number().min(0).nullable().default(null),
});
export const presenceSchema = z.object({ openBy: z.array(personSchema) });
