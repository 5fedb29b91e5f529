/** What rules and their metrics are called, in the trade's words. */
import { formatDuration, formatLimit, formatRate } from './figures-text.ts';
import type { FindingCode } from '../engine/figures.ts';
import type { RangeMetric, Rule, SpecBody } from './spec.ts';
import type { Unit } from './verdict.ts';

interface MetricWords {
  name: string;
  /** As it stands in one line of a table. */
  short: string;
  unit: Unit;
  /** The unit of a distance. */
  marginUnit: 'LU' | 'dB' | 's';
}

const metrics: Record<RangeMetric, MetricWords> = {
  integratedLufs: { name: 'Integrated loudness', short: 'integrated', unit: 'LUFS', marginUnit: 'LU' },
  truePeakDbtp: { name: 'Maximum true peak', short: 'true peak', unit: 'dBTP', marginUnit: 'dB' },
  samplePeakDbfs: { name: 'Maximum sample peak', short: 'sample peak', unit: 'dBFS', marginUnit: 'dB' },
  rangeLu: { name: 'Loudness range', short: 'range', unit: 'LU', marginUnit: 'LU' },
  shortTermMaxLufs: { name: 'Maximum short-term', short: 'short-term', unit: 'LUFS', marginUnit: 'LU' },
  momentaryMaxLufs: { name: 'Maximum momentary', short: 'momentary', unit: 'LUFS', marginUnit: 'LU' },
  peakToLoudnessLu: { name: 'PLR', short: 'PLR', unit: 'LU', marginUnit: 'LU' },
  durationSeconds: { name: 'Duration', short: 'duration', unit: 's', marginUnit: 's' },
};

/** Words of a metric; loudness in LKFS where the spec writes it so. */
export function metricWords(metric: RangeMetric, unit: SpecBody['unit'] = 'LUFS'): MetricWords {
  const words = metrics[metric];
  return words.unit === 'LUFS' ? { ...words, unit } : words;
}

export const factNames = {
  sampleRateHz: 'Sample rate',
  bitDepth: 'Bit depth',
  layout: 'Layout',
  container: 'Container',
  codec: 'Codec',
  audioChannels: 'Audio channels',
} as const;

export const findingNames: Record<FindingCode, string> = {
  truncated: 'Cut short',
  'size-lies': 'Sizes in the header',
  'not-a-number': 'Samples that are no numbers',
  'unreadable-part': 'Unreadable part',
  'layout-assumed': 'Layout not told',
  'measured-differently': 'Measured differently',
};

/** A fact's value in words: '48 kHz', '24 bit', '5.1'. */
export function factText(fact: keyof typeof factNames, value: string): string {
  if (fact === 'sampleRateHz') return formatRate(Number(value));
  if (fact === 'bitDepth') return `${value} bit`;
  return value;
}

/** A rule's name: 'Maximum true peak', 'Sample rate', 'Cut short'. */
export function ruleName(rule: Rule): string {
  switch (rule.kind) {
    case 'integrated':
      return metrics.integratedLufs.name;
    case 'limits':
      return metrics[rule.metric].name;
    case 'oneOf':
      return factNames[rule.fact];
    case 'finding':
      return findingNames[rule.code];
  }
}

/** Lower and upper limit of a numeric rule, `null` where open; both `null` for facts. */
export function limitsOf(rule: Rule): { atLeast: number | null; atMost: number | null } {
  if (rule.kind === 'limits') return { atLeast: rule.atLeast, atMost: rule.atMost };
  if (rule.kind !== 'integrated') return { atLeast: null, atMost: null };
  // In whole thousandths, so that -23 + 0.2 is the -22.8 that was meant.
  const exact = (value: number) => Math.round(value * 1000) / 1000;
  return {
    atLeast: rule.toleranceBelowLu === null ? null : exact(rule.targetLufs - rule.toleranceBelowLu),
    atMost: exact(rule.targetLufs + rule.toleranceAboveLu),
  };
}

const unsigned = (value: number) => formatLimit(Math.abs(value));

/** What a rule permits: 'at most −1.0 dBTP', '−23.0 ± 0.5 LUFS', '44.1 kHz or 48 kHz', 'must not be'. */
export function permittedText(rule: Rule, unit: SpecBody['unit'] = 'LUFS'): string {
  switch (rule.kind) {
    case 'integrated': {
      const target = formatLimit(rule.targetLufs);
      if (rule.toleranceBelowLu === null) return `at most ${formatLimit(limitsOf(rule).atMost ?? 0)} ${unit}`;
      return rule.toleranceAboveLu === rule.toleranceBelowLu
        ? `${target} ± ${unsigned(rule.toleranceAboveLu)} ${unit}`
        : `${target} +${unsigned(rule.toleranceAboveLu)}/\u2212${unsigned(rule.toleranceBelowLu)} ${unit}`;
    }
    case 'limits': {
      const words = metricWords(rule.metric, unit);
      const text = (value: number) =>
        rule.metric === 'durationSeconds' ? formatDuration(value) : `${formatLimit(value)} ${words.unit}`;
      if (rule.atLeast === null) return `at most ${text(rule.atMost ?? 0)}`;
      if (rule.atMost === null) return `at least ${text(rule.atLeast)}`;
      return `${rule.metric === 'durationSeconds' ? text(rule.atLeast) : formatLimit(rule.atLeast)} to ${text(rule.atMost)}`;
    }
    case 'oneOf':
      return rule.allowed.map((value) => factText(rule.fact, value)).join(' or ');
    case 'finding':
      return 'must not be';
  }
}
