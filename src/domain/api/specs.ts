import { z } from 'zod';
import { channelKindSchema, contentKindSchema } from '../vocabulary.ts';
import { specBodySchema } from '../spec.ts';
import { idSchema, momentSchema, organisationRefSchema, personSchema } from './common.ts';

const specVersionSchema = z.object({
  id: idSchema,
  number: z.number().int().nullable(),
  body: specBodySchema,
  changeNote: z.string(),
  createdBy: personSchema.nullable(),
  updatedAt: momentSchema,
  publishedBy: personSchema.nullable(),
  publishedAt: momentSchema.nullable(),
  inForceFrom: momentSchema.nullable(),
});
export type SpecVersion = z.infer<typeof specVersionSchema>;

export const specRowSchema = z.object({
  id: idSchema,
  name: z.string(),
  organisation: organisationRefSchema,
  /** The newest version in force now; `null` before the first. */
  current: specVersionSchema.nullable(),
  hasDraft: z.boolean(),
  /** Where it is used now. */
  usedBy: z.array(z.object({ channelId: idSchema, channelName: z.string(), contentKind: contentKindSchema })),
});
export type SpecRow = z.infer<typeof specRowSchema>;
export const specListSchema = z.object({ items: z.array(specRowSchema) });
/** Versions newest first, the draft (number null; only for its own organisation's spec owners) before all. */
export const specDetailSchema = specRowSchema.extend({
  versions: z.array(specVersionSchema),
  editable: z.boolean(),
});
export type SpecDetail = z.infer<typeof specDetailSchema>;

export const createSpecSchema = z.object({
  name: z.string().trim().min(1, 'Give the spec a name.').max(120),
  /** Start from a published document's starting spec, from a body, or from neither (a first sensible body). */
  startingSpecId: z.string().max(60).optional(),
  body: specBodySchema.optional(),
});
/** Which draft the writer has seen: its `updatedAt`, `null` for none. Left out: whatever is there is written over. */
const seenDraft = { seenUpdatedAt: momentSchema.nullable().optional() };
export const saveDraftSchema = z.object({
  body: specBodySchema,
  changeNote: z.string().trim().max(600).default(''),
  ...seenDraft,
});
export const publishSpecSchema = z.object({
  /** `null`: at once. A moment in the past is refused. */
  inForceFrom: momentSchema.nullable().default(null),
  ...seenDraft,
});
export const publishSpecResultSchema = z.object({
  spec: specDetailSchema,
  /** Verdicts that were made anew from kept measurements, and how many outcomes changed. */
  rejudged: z.number().int(),
  changed: z.number().int(),
});
export const startingSpecListSchema = z.object({
  items: z.array(
    z.object({
      id: z.string(),
      name: z.string(),
      contentKinds: z.array(contentKindSchema),
      body: specBodySchema,
    }),
  ),
});

const assignmentSchema = z.object({
  id: idSchema,
  contentKind: contentKindSchema,
  specId: idSchema,
  specName: z.string(),
  inForceFrom: momentSchema,
  /** 'now' for the one in force, 'planned' for those to come, 'past'. */
  standing: z.enum(['now', 'planned', 'past']),
});
export const channelRowSchema = z.object({
  id: idSchema,
  name: z.string(),
  kind: channelKindSchema,
  timeZone: z.string(),
  organisation: organisationRefSchema,
  assignments: z.array(assignmentSchema),
  /** Only for the channel's own organisation; empty for suppliers. */
  agreements: z.array(z.object({ id: idSchema, supplier: organisationRefSchema, createdAt: momentSchema })),
  editable: z.boolean(),
});
export type ChannelRow = z.infer<typeof channelRowSchema>;
export const channelListSchema = z.object({ items: z.array(channelRowSchema) });
export const createChannelSchema = z.object({
  name: z.string().trim().min(1, 'Give the channel a name.').max(120),
  kind: channelKindSchema,
  timeZone: z.string().refine((zone) => {
    try {
      return Boolean(new Intl.DateTimeFormat('en', { timeZone: zone }));
    } catch {
      return false;
    }
  }, 'This is not a time zone of the IANA list, such as Europe/London.'),
});
export const patchChannelSchema = createChannelSchema.partial();
export const createAssignmentSchema = z.object({
  contentKind: contentKindSchema,
  specId: idSchema,
  /** `null`: at once. A moment in the past is refused. */
  inForceFrom: momentSchema.nullable().default(null),
});
export const createAssignmentResultSchema = z.object({
  channel: channelRowSchema,
  rejudged: z.number().int(),
  changed: z.number().int(),
});
export const createAgreementSchema = z.object({ supplierId: idSchema });
export const supplierListSchema = z.object({ items: z.array(organisationRefSchema) });
export type PublishSpecResult = z.infer<typeof publishSpecResultSchema>;
export type CreateAssignmentResult = z.infer<typeof createAssignmentResultSchema>;
export type StartingSpecList = z.infer<typeof startingSpecListSchema>;
