/**
 * The judge: a measurement held against a spec version, rule by rule (MEASUREMENT, Verdicts). Pure and instant, so a new
 * version judges old measurements without measuring again.
 */
import { clippedLengths, defaultSilence } from '../engine/facts/thresholds.ts';
import {
  integrityCodes,
  signalCodes,
  type Figures,
  type FindingCode,
  type Measurement,
  type SignalFacts,
} from '../engine/figures.ts';
import { formatDuration, formatLevel, roundHalfAway } from './figures-text.ts';
import { factText, limitsOf, metricWords, permittedText, ruleName } from './rule-words.ts';
import type { RangeMetric, Rule, SignalMetric, SpecBody } from './spec.ts';
import type { RuleVerdict, VerdictBody } from './verdict.ts';
import type { OverallOutcome } from './vocabulary.ts';

/** What the judge reads of a measurement. A finding's code is any string: stored findings may be of a newer engine. */
export type Judged = Pick<Measurement, 'format' | 'figures'> & {
  findings: readonly { code: string; message: string }[];
};

/** Under a minute a range is not judged (R 128 n, s1). */
const shortForRangeSeconds = 60;

/** What a spec holds the file's integrity to where it says nothing itself: a file cut short is refused, the rest is told. */
function impliedRules(body: SpecBody): Rule[] {
  const said = new Set<string>(body.rules.flatMap((rule) => (rule.kind === 'finding' ? [rule.code] : [])));
  return integrityCodes
    .filter((code) => !said.has(code))
    .map((code) => ({
      id: `integrity-${code}`,
      kind: 'finding',
      code,
      breach: code === 'truncated' ? 'reject' : 'advise',
      measurementTolerance: 0,
    }));
}

const notLookedFor = 'not known: measured by an engine before 2.0.0';

type Value = { figure: number } | { reason: string };
const known = (figure: number | null, reason: string): Value => (figure === null ? { reason } : { figure });

function valueOf(metric: RangeMetric, { figures, format }: Judged, body: SpecBody, rule: Rule): Value {
  const { loudness, truePeak, samplePeak } = figures;
  // Of the presentation: the file may hold more audio channels.
  const mono = truePeak.perChannelDbtp.length === 1 && body.mono === 'asDual';
  const integrated = mono ? (loudness.dualMonoIntegratedLufs ?? null) : loudness.integratedLufs;
  // Ungated figures of one channel heard on two stand 3.01 LU higher: twice the power.
  const dual = (value: number | null) => (value === null || !mono ? value : value + 10 * Math.log10(2));
  switch (metric) {
    case 'integratedLufs':
      return known(integrated, 'no value: below the gate');
    case 'truePeakDbtp':
      return known(truePeak.maxDbtp, 'no value: digital silence');
    case 'samplePeakDbfs':
      return known(samplePeak.maxDbfs, 'no value: digital silence');
    case 'rangeLu':
      return known(
        loudness.rangeLu,
        figures.measuredSeconds < 3 ? 'no value: shorter than 3 s' : 'no value: below the gate',
      );
    case 'shortTermMaxLufs':
      return known(
        dual(loudness.shortTermMaxLufs),
        figures.measuredSeconds < 3 ? 'no value: shorter than 3 s' : 'no value: silence',
      );
    case 'momentaryMaxLufs':
      return known(
        dual(loudness.momentaryMaxLufs),
        figures.measuredSeconds < 0.4 ? 'no value: shorter than 0.4 s' : 'no value: silence',
      );
    case 'peakToLoudnessLu':
      return integrated === null || truePeak.maxDbtp === null
        ? { reason: 'no value: below the gate' }
        : { figure: truePeak.maxDbtp - integrated };
    case 'durationSeconds':
      return { figure: figures.measuredSeconds };
    case 'downmixIntegratedLufs':
    case 'downmixTruePeakDbtp':
      return downmixValue(metric, figures);
    case 'bitRateKbps':
      return known(format.bitRateKbps ?? null, 'no value: the file is not coded, or does not say');
    default:
      return figures.signal ? signalValue(metric, figures.signal, rule) : { reason: notLookedFor };
  }
}

function downmixValue(metric: 'downmixIntegratedLufs' | 'downmixTruePeakDbtp', figures: Figures): Value {
  if (!figures.downmix) return { reason: 'no value: nothing to mix down' };
  return metric === 'downmixIntegratedLufs'
    ? known(figures.downmix.integratedLufs, 'no value: below the gate')
    : known(figures.downmix.truePeakDbtp, 'no value: digital silence');
}

/** A fact of the signal as a figure. */
function signalValue(metric: SignalMetric, signal: SignalFacts, rule: Rule): Value {
  const pair = 'no value: no left and right with signal';
  const level = (rule.kind === 'limits' ? rule.silenceLevelDbfs : undefined) ?? defaultSilence.levelDbfs;
  const silence = signal.silence.find(({ levelDbfs }) => levelDbfs === level);
  switch (metric) {
    case 'silenceHeadSeconds':
      return known(silence?.headSeconds ?? null, 'not known at this level');
    case 'silenceTailSeconds':
      return known(silence?.tailSeconds ?? null, 'not known at this level');
    case 'silenceInsideSeconds':
      return known(silence?.longestInsideSeconds ?? null, 'not known at this level');
    case 'dropOutCount':
      return { figure: signal.dropOuts.count };
    case 'clippedRunCount':
      return clippedRuns(
        signal,
        (rule.kind === 'limits' ? rule.clippedSamples : undefined) ?? clippedLengths[0],
      );
    case 'dcOffsetPercent':
      return { figure: Math.max(0, ...signal.dcOffsetPercent.map(Math.abs)) };
    case 'balanceLu':
      return known(signal.stereo?.balanceLu ?? null, pair);
    case 'correlationLowest':
      return known(signal.stereo?.correlationLowest ?? null, pair);
    case 'outOfPhasePercent':
      return known(signal.stereo?.belowZeroPercent ?? null, pair);
    case 'bandwidthHz':
      return known(signal.bandwidthHz, 'no value: silence about 1 kHz');
    case 'lineUpToneDbfs':
      return known(signal.lineUpTone?.levelDbfs ?? null, 'no value: no line-up tone found');
  }
}

function clippedRuns({ clipping }: SignalFacts, samples: number): Value {
  if (samples === clippedLengths[0] || clipping.count === 0) return { figure: clipping.count };
  const rung = clipping.atLeast?.find((one) => one.samples === samples);
  return known(rung?.count ?? null, 'not known for runs of this length');
}

const integrityMetric = 'finding';

/** One rule against the measurement. */
function judgeRule(rule: Rule, judged: Judged, body: SpecBody): RuleVerdict {
  const frame = {
    ruleId: rule.id,
    name: ruleName(rule),
    metric: null as string | null,
    unit: '' as RuleVerdict['unit'],
    breach: rule.breach,
    judged: null,
    measured: null,
    ...limitsOf(rule),
    permittedText: permittedText(rule, body.unit),
    margin: null,
    neededTolerance: false,
    reason: null,
  };
  const breached = rule.breach === 'reject' ? ('fail' as const) : ('advisory' as const);
  switch (rule.kind) {
    case 'finding': {
      if (!judged.figures.signal && (signalCodes as readonly string[]).includes(rule.code))
        return { ...frame, metric: integrityMetric, ...notJudged(notLookedFor) };
      const found = judged.findings.find((finding) => finding.code === rule.code);
      return {
        ...frame,
        metric: integrityMetric,
        outcome: found ? breached : 'pass',
        judgedText: found ? 'found' : 'none',
        marginText: found ? found.message : 'as asked',
      };
    }
    case 'oneOf': {
      const value = factOf(rule.fact, judged);
      if (value === null)
        return { ...frame, ...notJudged(`the ${ruleName(rule).toLowerCase()} is not known`) };
      const asked = rule.allowed.includes(value);
      return {
        ...frame,
        outcome: asked ? 'pass' : breached,
        judgedText: factText(rule.fact, value),
        marginText: asked ? 'as asked' : 'not as asked',
      };
    }
    default:
      return judgeFigure(rule, judged, body, frame, breached);
  }
}

const notJudged = (reason: string) => ({
  outcome: 'not_judged' as const,
  judgedText: 'no value',
  marginText: reason,
  reason,
});

function judgeFigure(
  rule: Extract<Rule, { kind: 'integrated' | 'limits' }>,
  judged: Judged,
  body: SpecBody,
  frame: Omit<RuleVerdict, 'outcome' | 'judgedText' | 'marginText'>,
  breached: 'fail' | 'advisory',
): RuleVerdict {
  const metric = rule.kind === 'integrated' ? 'integratedLufs' : rule.metric;
  const words = metricWords(metric, body.unit);
  const withMetric = { ...frame, metric, unit: words.unit };
  const value = valueOf(metric, judged, body, rule);
  if ('reason' in value) return { ...withMetric, ...notJudged(value.reason) };
  if (
    rule.kind === 'limits' &&
    metric === 'rangeLu' &&
    !rule.judgeShortProgrammes &&
    judged.figures.measuredSeconds < shortForRangeSeconds
  )
    return {
      ...withMetric,
      measured: value.figure,
      ...notJudged('short for a range: under 60 s'),
      judgedText: formatLevel(value.figure),
    };

  // Levels are shown to one decimal, times to the millisecond; the figure as shown is the one that is judged.
  const { decimals } = words;
  const shown = body.rounding === 'shown' || decimals !== 1 ? decimals : 2;
  const figure = body.rounding === 'shown' ? roundHalfAway(value.figure, decimals) : value.figure;
  const margin = marginOf(figure, frame.atLeast, frame.atMost);
  const inside = margin >= 0;
  // A hair under the tolerance, so that binary fractions do not decide at its edge.
  const excused = !inside && -margin <= rule.measurementTolerance + 1e-9;
  const outcome = inside || excused ? 'pass' : breached;
  return {
    ...withMetric,
    outcome,
    judged: figure,
    measured: value.figure,
    judgedText: metric === 'durationSeconds' ? formatDuration(figure) : formatLevel(figure, shown),
    margin,
    marginText:
      marginText(figure, margin, frame, words.marginUnit, metric === 'durationSeconds' ? 1 : shown) +
      (excused ? ', within the tolerance of measurement' : ''),
    neededTolerance: excused,
  };
}

/** Distance to the nearest limit, positive inside, in the steps that figures are shown in (no dust of binary fractions). */
function marginOf(figure: number, atLeast: number | null, atMost: number | null): number {
  const toUpper = atMost === null ? Infinity : atMost - figure;
  const toLower = atLeast === null ? Infinity : figure - atLeast;
  return Math.round(Math.min(toUpper, toLower) * 1e6) / 1e6 + 0;
}

function marginText(
  figure: number,
  margin: number,
  { atLeast, atMost }: { atLeast: number | null; atMost: number | null },
  unit: ReturnType<typeof metricWords>['marginUnit'],
  decimals: number,
): string {
  const side =
    margin >= 0
      ? 'inside'
      : atMost !== null && figure > atMost
        ? 'over'
        : atLeast !== null && figure < atLeast
          ? 'under'
          : 'over';
  const distance = Math.abs(margin);
  if (margin >= 0 && distance === 0) return 'on the limit';
  return `${formatLevel(distance, decimals)}${unit === '' ? '' : ` ${unit}`} ${side}`;
}

function factOf(fact: Extract<Rule, { kind: 'oneOf' }>['fact'], { format, figures }: Judged): string | null {
  switch (fact) {
    case 'effectiveBitDepth':
      return figures.signal?.effectiveBitDepth?.toString() ?? null;
    case 'frameRate':
    case 'startTimecode':
      return format[fact] ?? null;
    case 'sampleRateHz':
      return String(format.sampleRateHz);
    case 'bitDepth':
      return format.bitDepth === null ? null : String(format.bitDepth);
    case 'audioChannels':
      return String(format.channels);
    default:
      return format[fact];
  }
}

function overall(rules: readonly RuleVerdict[]): OverallOutcome {
  if (rules.some((rule) => rule.outcome === 'fail')) return 'fail';
  if (
    rules.some(
      (rule) => rule.outcome === 'advisory' || (rule.outcome === 'not_judged' && rule.breach === 'reject'),
    )
  )
    return 'advisory';
  return 'pass';
}

/** Rank of a rule for "nearest limit": breaches that reject, then advisories, then what could not be judged, then passes. */
function rank(rule: RuleVerdict): [number, number, number] {
  const byOutcome = { fail: 0, advisory: 1, not_judged: rule.breach === 'reject' ? 1 : 3, pass: 2 }[
    rule.outcome
  ];
  // Of passes only figures have a nearness; of breaches integrity and format come first, then levels, then the rest.
  const levels = ['LUFS', 'LKFS', 'LU', 'dBTP', 'dBFS'].includes(rule.unit);
  const kind =
    rule.outcome === 'pass'
      ? levels
        ? 0
        : rule.margin !== null
          ? 1
          : 2
      : levels
        ? 1
        : rule.metric === null || rule.metric === integrityMetric
          ? 0
          : 2;
  return [byOutcome, kind, rule.margin ?? 0];
}

const before = (a: RuleVerdict, b: RuleVerdict): number => {
  const [ra, rb] = [rank(a), rank(b)];
  return ra[0] - rb[0] || ra[1] - rb[1] || ra[2] - rb[2];
};

function nearestText(rule: RuleVerdict): string {
  const isFact = rule.metric === null || rule.metric === integrityMetric;
  const short = isFact ? rule.name.toLowerCase() : metricWords(rule.metric as RangeMetric).short;
  const advised = rule.outcome === 'advisory' ? ', advised' : '';
  if (rule.metric === integrityMetric)
    return rule.outcome === 'pass' ? 'nothing found' : `${short}${advised}`;
  if (rule.outcome === 'not_judged') return `${short} not judged`;
  if (isFact)
    return rule.outcome === 'pass'
      ? `${short} as asked`
      : `${short} ${rule.judgedText}, not as asked${advised}`;
  return `${short} ${rule.marginText}${advised}`;
}

/** Judges every rule of the spec and the integrity of the file. Nothing passes in silence. */
export function judge(judged: Judged, body: SpecBody): VerdictBody {
  const asked = body.rules.map((rule) => judgeRule(rule, judged, body));
  // What was not asked for and was not found need not be listed.
  const implied = impliedRules(body)
    .map((rule) => judgeRule(rule, judged, body))
    .filter((rule) => rule.outcome !== 'pass');
  const rules = [...asked, ...implied];
  const nearest = [...rules].sort(before)[0] ?? null;
  return {
    outcome: overall(rules),
    rounding: body.rounding,
    rules,
    nearestRuleId: nearest?.ruleId ?? null,
    nearestText: nearest ? nearestText(nearest) : '',
  };
}

/** The codes of findings that no rule of the spec names: what `judge` adds by itself. */
export const impliedCodes = (body: SpecBody): FindingCode[] =>
  impliedRules(body).flatMap((rule) => (rule.kind === 'finding' ? [rule.code] : []));
