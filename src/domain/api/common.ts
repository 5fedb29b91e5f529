/** Shapes that every list and every refusal of /api/v1 shares. */
import { z } from 'zod';

export const idSchema = z.uuid();
export const momentSchema = z.iso.datetime({ offset: true });

/** `{items, nextCursor, total?}`; a cursor is opaque to the caller. */
export const listOf = <T extends z.ZodType>(item: T) =>
  z.object({ items: z.array(item), nextCursor: z.string().nullable(), total: z.number().int().optional() });

export const pageQuerySchema = z.object({
  cursor: z.string().max(400).optional(),
  limit: z.coerce.number().int().min(1).max(200).catch(50).default(50),
});

/** A refusal: a code from one table (server/refusals.ts), one plain sentence, and what it was about. */
export const problemSchema = z.object({
  error: z.object({
    code: z.string(),
    message: z.string(),
    /** By path of the field, for forms: {'files.0.fileName': 'Give the file a name.'}. */
    fields: z.record(z.string(), z.string()).optional(),
    /** Names the log entry of a surprise. */
    reference: z.string().optional(),
  }),
});
export type Problem = z.infer<typeof problemSchema>['error'];

/** One answer per item of a bulk call, in the order asked. */
export const itemResultSchema = <T extends z.ZodType>(value: T) =>
  z.discriminatedUnion('ok', [
    z.object({ ok: z.literal(true), id: z.string(), value }),
    z.object({ ok: z.literal(false), id: z.string(), error: problemSchema.shape.error }),
  ]);

export const personSchema = z.object({ id: idSchema, name: z.string() });
export const organisationRefSchema = z.object({ id: idSchema, name: z.string() });
