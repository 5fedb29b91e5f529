import { z } from 'zod';
import { roleSchema } from '../vocabulary.ts';
import {
  idSchema,
  listOf,
  momentSchema,
  organisationRefSchema,
  pageQuerySchema,
  personSchema,
} from './common.ts';

export const meSchema = z.object({
  id: idSchema,
  name: z.string(),
  email: z.string(),
  organisation: organisationRefSchema.extend({
    isSupplier: z.boolean(),
    isDistributor: z.boolean(),
    timeZone: z.string(),
  }),
  roles: z.array(roleSchema),
  organisations: z.array(organisationRefSchema),
});
export type Me = z.infer<typeof meSchema>;

export const memberSchema = z.object({
  id: idSchema,
  userId: idSchema,
  name: z.string(),
  email: z.string(),
  roles: z.array(roleSchema),
  joinedAt: momentSchema,
  lastSeenAt: momentSchema.nullable(),
  openSessions: z.number().int(),
});
export const invitationSchema = z.object({
  id: idSchema,
  email: z.string(),
  roles: z.array(roleSchema),
  expiresAt: momentSchema,
});
export const memberListSchema = z.object({
  items: z.array(memberSchema),
  invitations: z.array(invitationSchema),
});
export const inviteSchema = z.object({
  email: z.email('This is not an e-mail address.').trim().toLowerCase(),
  roles: z.array(roleSchema).min(1, 'Choose at least one role.'),
});
export const patchMemberSchema = z.object({ roles: z.array(roleSchema).min(1, 'Choose at least one role.') });
export const passwordSchema = z.string().min(12, 'Use 12 characters or more.').max(200);
export const changeOrganisationSchema = z.object({ organisationId: idSchema });

export const activitySchema = z.object({
  id: z.string(),
  action: z.string(),
  /** One line that a person reads: 'approved The Tallow Road 1.04 for Harrow One'. */
  sentence: z.string(),
  actor: personSchema.nullable(),
  organisationName: z.string(),
  subject: z.object({ kind: z.string(), id: z.string() }),
  createdAt: momentSchema,
});
export const activityListSchema = listOf(activitySchema);
export const activityQuerySchema = pageQuerySchema.extend({ q: z.string().max(100).optional() });

/** What the event stream carries; each browser holds one stream. */
export const liveEventSchema = z.discriminatedUnion('kind', [
  z.object({
    kind: z.literal('deliverable'),
    id: idSchema,
    state: z.string(),
    progress: z.object({ secondsDone: z.number(), secondsTotal: z.number().nullable() }).nullable(),
  }),
  z.object({ kind: z.literal('submission'), id: idSchema, state: z.string(), version: z.number().int() }),
  z.object({ kind: z.literal('presence'), submissionId: idSchema, openBy: z.array(personSchema) }),
  z.object({ kind: z.literal('specs') }),
]);
export type LiveEvent = z.infer<typeof liveEventSchema>;
