/** The rule model of a spec version: what is permitted of each metric, and what a breach means. */
import { z } from 'zod';
import { clippedLengths, silenceLevelsDbfs } from '../engine/facts/thresholds.ts';
import { findingCodes } from '../engine/figures.ts';

/** What a breach means: the delivery is refused, or the supplier is told. */
export const breachSchema = z.enum(['reject', 'advise']);
export type Breach = z.infer<typeof breachSchema>;

const ruleBase = {
  /** Stable within a spec across its versions, so that waivers and comparisons can name it. */
  id: z.string().regex(/^[a-z0-9][a-z0-9-]{0,39}$/),
  breach: breachSchema,
  /** Allowance for the error of measurement (R 128 i and m): off at 0; a pass that needed it says so. */
  measurementTolerance: z.number().min(0).max(5).default(0),
};
const lufs = z.number().min(-70).max(5);

/** Facts of the signal that are figures. */
export const signalMetrics = [
  'silenceHeadSeconds',
  'silenceTailSeconds',
  'silenceInsideSeconds',
  'dropOutCount',
  'clippedRunCount',
  'dcOffsetPercent',
  'balanceLu',
  'correlationLowest',
  'outOfPhasePercent',
  'bandwidthHz',
  'lineUpToneDbfs',
] as const;
export type SignalMetric = (typeof signalMetrics)[number];

/** Numeric metrics that are judged against a lower and an upper limit, either of which may be open. */
export const rangeMetrics = [
  'integratedLufs',
  'truePeakDbtp',
  'samplePeakDbfs',
  'rangeLu',
  'shortTermMaxLufs',
  'momentaryMaxLufs',
  'peakToLoudnessLu',
  'durationSeconds',
  'downmixIntegratedLufs',
  'downmixTruePeakDbtp',
  'bitRateKbps',
  ...signalMetrics,
] as const;
export type RangeMetric = (typeof rangeMetrics)[number];

export const integratedRuleSchema = z.object({
  ...ruleBase,
  kind: z.literal('integrated'),
  targetLufs: lufs,
  toleranceAboveLu: z.number().min(0).max(30),
  /** `null`: no lower limit. */
  toleranceBelowLu: z.number().min(0).max(60).nullable(),
});

export const limitsRuleSchema = z
  .object({
    ...ruleBase,
    kind: z.literal('limits'),
    metric: z.enum(rangeMetrics).exclude(['integratedLufs']),
    atLeast: z.number().min(-200).max(1_000_000).nullable(),
    atMost: z.number().min(-200).max(1_000_000).nullable(),
    /** Loudness range of under 60 s of programme is not judged (R 128 s1) unless the spec insists. */
    judgeShortProgrammes: z.boolean().default(false),
    /** Of the rules on silence: the level under which every audio channel counts as silent; absent: -60 dBFS. */
    silenceLevelDbfs: z.union(silenceLevelsDbfs.map((level) => z.literal(level))).optional(),
    /** Of the rule on clipped runs: how many samples a run has at the least; absent: 3. */
    clippedSamples: z.union(clippedLengths.map((samples) => z.literal(samples))).optional(),
  })
  .refine((r) => r.atLeast !== null || r.atMost !== null, {
    message: 'Give a lower limit, an upper limit, or both.',
  })
  .refine((r) => r.atLeast === null || r.atMost === null || r.atLeast <= r.atMost, {
    message: 'The lower limit must not be above the upper one.',
  });

/** Facts of the file that must be one of a list. Values are strings; rates in Hz and depths in bits as digits. */
export const oneOfRuleSchema = z.object({
  ...ruleBase,
  kind: z.literal('oneOf'),
  fact: z.enum([
    'sampleRateHz',
    'bitDepth',
    'effectiveBitDepth',
    'layout',
    'container',
    'codec',
    'audioChannels',
    'frameRate',
    'startTimecode',
  ]),
  allowed: z.array(z.string().min(1).max(40)).min(1).max(30),
});

/** A finding of the file's integrity or of the signal that must not be there. */
export const findingRuleSchema = z.object({
  ...ruleBase,
  kind: z.literal('finding'),
  code: z.enum(findingCodes),
});

export const ruleSchema = z.discriminatedUnion('kind', [
  integratedRuleSchema,
  limitsRuleSchema,
  oneOfRuleSchema,
  findingRuleSchema,
]);
export type Rule = z.infer<typeof ruleSchema>;

export const specBodySchema = z
  .object({
    /** LUFS or LKFS: the same scale, written as the receiving party writes it. */
    unit: z.enum(['LUFS', 'LKFS']).default('LUFS'),
    /** 'shown': each rule judges the figure as shown (one decimal, half away from zero); 'unrounded': the full figure. */
    rounding: z.enum(['shown', 'unrounded']).default('shown'),
    /** How a one-channel file is judged: as it is, or as it will be heard on two loudspeakers. */
    mono: z.enum(['asOne', 'asDual']).default('asOne'),
    /** The published document that the rules were taken from, if any. */
    source: z
      .object({
        document: z.string().min(1).max(200),
        edition: z.string().max(120),
        note: z.string().max(600).default(''),
      })
      .nullable()
      .default(null),
    rules: z.array(ruleSchema).min(1).max(60),
  })
  .refine((s) => new Set(s.rules.map((r) => r.id)).size === s.rules.length, {
    message: 'Two rules have the same id.',
    path: ['rules'],
  });
/** What a spec version says. Published bodies are kept as they were parsed. */
export type SpecBody = z.infer<typeof specBodySchema>;

/** A starting spec from a published document: copied into an organisation, then its own. */
export interface StartingSpec {
  id: string;
  name: string;
  contentKinds: readonly import('./vocabulary.ts').ContentKind[];
  body: SpecBody;
}
