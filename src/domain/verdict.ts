/** A measurement held against a spec version. The judge is a pure function; see judge.ts. */
import { z } from 'zod';
import { breachSchema } from './spec.ts';
import { outcomeSchema, overallOutcomeSchema } from './vocabulary.ts';

export const unitSchema = z.enum(['LUFS', 'LKFS', 'LU', 'dBTP', 'dBFS', 's', '%', 'Hz', 'kbit/s', '']);
export type Unit = z.infer<typeof unitSchema>;

export const ruleVerdictSchema = z.object({
  ruleId: z.string(),
  /** The rule's name in the trade's words: 'Integrated loudness', 'Maximum true peak', 'Sample rate'. */
  name: z.string(),
  /** What the load line needs: the metric key, or `null` for rules without a scale. */
  metric: z.string().nullable(),
  unit: unitSchema,
  breach: breachSchema,
  outcome: outcomeSchema,
  /** The figure that was judged (rounded as the spec says); `null` where there is none. */
  judged: z.number().nullable(),
  /** The full figure before rounding. */
  measured: z.number().nullable(),
  /** The judged figure or fact in words: '−22.9', '48 kHz', '5.1'. */
  judgedText: z.string(),
  atLeast: z.number().nullable(),
  atMost: z.number().nullable(),
  /** 'at most −1.0 dBTP', '−23.0 ± 0.5 LUFS', '48 kHz'. */
  permittedText: z.string(),
  /** Distance to the nearest limit, positive inside and negative beyond; `null` for facts and where nothing was judged. */
  margin: z.number().nullable(),
  /** '0.4 LU inside', '1.2 dB over', 'as asked', 'not as asked', or the reason it was not judged. */
  marginText: z.string(),
  /** True where the pass needed the measurement tolerance. */
  neededTolerance: z.boolean(),
  /** Why it was not judged; `null` otherwise. */
  reason: z.string().nullable(),
  /** In a verdict over several presentations: the one in which the rule ends like this. */
  presentation: z.string().optional(),
});
export type RuleVerdict = z.infer<typeof ruleVerdictSchema>;

export const verdictBodySchema = z.object({
  outcome: overallOutcomeSchema,
  rounding: z.enum(['shown', 'unrounded']),
  rules: z.array(ruleVerdictSchema),
  /** The rule whose limit is nearest (worst breach first), as MEASUREMENT.md orders them; `null` when nothing was judged. */
  nearestRuleId: z.string().nullable(),
  /** One line for a table row: 'true peak 1.3 dB over', 'integrated 0.4 LU inside', 'range 0.4 LU over, advised'. */
  nearestText: z.string(),
});
export type VerdictBody = z.infer<typeof verdictBodySchema>;

export const excursionSchema = z.object({
  number: z.number().int(),
  ruleId: z.string(),
  name: z.string(),
  breach: breachSchema,
  startSeconds: z.number(),
  lengthSeconds: z.number(),
  /** Worst value in the stretch, in the rule's unit, and how far beyond the limit it stands (positive). */
  worst: z.number(),
  beyond: z.number(),
  unit: unitSchema,
});
export type Excursion = z.infer<typeof excursionSchema>;
