/** What the parts of measuring say to each other: the service, the queue's worker, and the child process that measures. */
import { z } from 'zod';
import { figuresSchema, findingSchema, formatSchema } from '../../domain/api/deliverables.ts';
import { measuringPlanSchema } from '../../domain/measuring-plan.ts';
import { findingCodes } from '../../engine/figures.ts';
import { speakers } from '../../engine/layouts.ts';
import { progressSchema, type Progress } from './progress.ts';

/** What whoever measures is told, and nothing more: it needs no database. */
export const measuringTaskSchema = z.object({
  deliverableId: z.uuid(),
  organisationId: z.uuid(),
  storageKey: z.string(),
  fileName: z.string(),
  byteSize: z.number(),
  sha256Declared: z.string().nullable(),
  plan: measuringPlanSchema,
  /** The files of a set of mono files, in order; `null` for what is one file. */
  parts: z
    .array(
      z.object({
        storageKey: z.string(),
        fileName: z.string(),
        byteSize: z.number(),
        sha256Declared: z.string().nullable(),
        speaker: z.enum(speakers),
      }),
    )
    .nullable(),
});
export type MeasuringTask = z.infer<typeof measuringTaskSchema>;

/** How it ends. 'file': nothing but another file helps. 'surroundings': try again. 'surprise': counts as a death. */
export const measuringOutcomeSchema = z.discriminatedUnion('kind', [
  z.object({
    kind: z.literal('measured'),
    /** One measurement each, in the plan's order. */
    presentations: z
      .array(
        z.object({
          // As measured, which may be more than a plan may ask for: a whole file has what it has.
          presentation: z.object({
            name: z.string(),
            audioChannels: z.array(z.number().int()),
            speakers: z.array(z.enum(speakers)),
          }),
          format: formatSchema,
          figures: figuresSchema,
          findings: z.array(findingSchema.extend({ code: z.enum(findingCodes) })),
          seriesKey: z.string(),
        }),
      )
      .min(1),
    engineVersion: z.string(),
    parametersHash: z.string(),
    sha256: z.string().regex(/^[0-9a-f]{64}$/),
    measuringSeconds: z.number(),
  }),
  z.object({ kind: z.literal('file'), code: z.string(), message: z.string(), sha256: z.string().nullable() }),
  z.object({ kind: z.literal('surroundings'), message: z.string() }),
  z.object({ kind: z.literal('surprise'), message: z.string() }),
]);
export type MeasuringOutcome = z.infer<typeof measuringOutcomeSchema>;

/** Has a file measured off this event loop. Rejects when whoever measured died; `signal` ends it early as 'surroundings'. */
export type MeasureElsewhere = (
  task: MeasuringTask,
  options: { onProgress: (progress: Progress) => void; signal: AbortSignal },
) => Promise<MeasuringOutcome>;

/** How a run of a deliverable ended. */
export type MeasuringEnd =
  { kind: 'measured' | 'nothing-to-do' | 'handed-back' } | { kind: 'unreadable'; reason: string };

/** Trouble of the surroundings, or a death: the queue tries again, with growing pauses. */
export class TryAgain extends Error {
  override name = 'TryAgain';
}

/** From the worker to its child. */
export const toChildSchema = z.object({ kind: z.literal('measure'), task: measuringTaskSchema });
export type ToChild = z.infer<typeof toChildSchema>;

/** From the child to its worker: 'ready' once, when it has loaded; 'alive' while bytes are read and there is no progress to tell. */
export const fromChildSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('ready') }),
  z.object({ kind: z.literal('progress'), progress: progressSchema }),
  z.object({ kind: z.literal('alive') }),
  z.object({ kind: z.literal('outcome'), outcome: measuringOutcomeSchema }),
]);
export type FromChild = z.infer<typeof fromChildSchema>;
