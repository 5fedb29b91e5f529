/** What rules and their metrics are called, in the trade's words. */
import { formatDuration, formatLevel, formatLimit, formatRate } from './figures-text.ts';
import type { FindingCode } from '../engine/figures.ts';
import type { RangeMetric, Rule, SpecBody } from './spec.ts';
import type { Unit } from './verdict.ts';

interface MetricWords {
  name: string;
  /** As it stands in one line of a table. */
  short: string;
  unit: Unit;
  /** The unit of a distance; empty where it is a plain number. */
  marginUnit: 'LU' | 'dB' | 's' | '%' | 'Hz' | 'kbit/s' | '';
  /** Decimals of the figure as shown. */
  decimals: number;
}

const metrics: Record<RangeMetric, MetricWords> = {
  integratedLufs: {
    name: 'Integrated loudness',
    short: 'integrated',
    unit: 'LUFS',
    marginUnit: 'LU',
    decimals: 1,
  },
  truePeakDbtp: {
    name: 'Maximum true peak',
    short: 'true peak',
    unit: 'dBTP',
    marginUnit: 'dB',
    decimals: 1,
  },
  samplePeakDbfs: {
    name: 'Maximum sample peak',
    short: 'sample peak',
    unit: 'dBFS',
    marginUnit: 'dB',
    decimals: 1,
  },
  rangeLu: { name: 'Loudness range', short: 'range', unit: 'LU', marginUnit: 'LU', decimals: 1 },
  shortTermMaxLufs: {
    name: 'Maximum short-term',
    short: 'short-term',
    unit: 'LUFS',
    marginUnit: 'LU',
    decimals: 1,
  },
  momentaryMaxLufs: {
    name: 'Maximum momentary',
    short: 'momentary',
    unit: 'LUFS',
    marginUnit: 'LU',
    decimals: 1,
  },
  peakToLoudnessLu: { name: 'PLR', short: 'PLR', unit: 'LU', marginUnit: 'LU', decimals: 1 },
  durationSeconds: { name: 'Duration', short: 'duration', unit: 's', marginUnit: 's', decimals: 3 },
  downmixIntegratedLufs: {
    name: 'Integrated loudness of the stereo downmix',
    short: 'downmix integrated',
    unit: 'LUFS',
    marginUnit: 'LU',
    decimals: 1,
  },
  downmixTruePeakDbtp: {
    name: 'Maximum true peak of the stereo downmix',
    short: 'downmix true peak',
    unit: 'dBTP',
    marginUnit: 'dB',
    decimals: 1,
  },
  silenceHeadSeconds: {
    name: 'Silence at the head',
    short: 'silence at the head',
    unit: 's',
    marginUnit: 's',
    decimals: 2,
  },
  silenceTailSeconds: {
    name: 'Silence at the tail',
    short: 'silence at the tail',
    unit: 's',
    marginUnit: 's',
    decimals: 2,
  },
  silenceInsideSeconds: {
    name: 'Longest silence inside',
    short: 'silence inside',
    unit: 's',
    marginUnit: 's',
    decimals: 2,
  },
  dropOutCount: { name: 'Drop-outs', short: 'drop-outs', unit: '', marginUnit: '', decimals: 0 },
  clippedRunCount: { name: 'Clipped runs', short: 'clipped runs', unit: '', marginUnit: '', decimals: 0 },
  dcOffsetPercent: { name: 'DC offset', short: 'DC offset', unit: '%', marginUnit: '%', decimals: 2 },
  balanceLu: {
    name: 'Balance, left over right',
    short: 'balance',
    unit: 'LU',
    marginUnit: 'LU',
    decimals: 2,
  },
  correlationLowest: {
    name: 'Lowest correlation',
    short: 'correlation',
    unit: '',
    marginUnit: '',
    decimals: 2,
  },
  outOfPhasePercent: {
    name: 'Time out of phase',
    short: 'time out of phase',
    unit: '%',
    marginUnit: '%',
    decimals: 1,
  },
  bandwidthHz: { name: 'Bandwidth', short: 'bandwidth', unit: 'Hz', marginUnit: 'Hz', decimals: 0 },
  lineUpToneDbfs: {
    name: 'Level of the line-up tone',
    short: 'line-up tone',
    unit: 'dBFS',
    marginUnit: 'dB',
    decimals: 1,
  },
  bitRateKbps: { name: 'Bit rate', short: 'bit rate', unit: 'kbit/s', marginUnit: 'kbit/s', decimals: 0 },
};

/** Words of a metric; loudness in LKFS where the spec writes it so. */
export function metricWords(metric: RangeMetric, unit: SpecBody['unit'] = 'LUFS'): MetricWords {
  const words = metrics[metric];
  return words.unit === 'LUFS' ? { ...words, unit } : words;
}

export const factNames = {
  sampleRateHz: 'Sample rate',
  bitDepth: 'Bit depth',
  effectiveBitDepth: 'Bits in use',
  layout: 'Layout',
  container: 'Container',
  codec: 'Codec',
  audioChannels: 'Audio channels',
  frameRate: 'Frame rate',
  startTimecode: 'Start timecode',
} as const;

export const findingNames: Record<FindingCode, string> = {
  truncated: 'Cut short',
  'size-lies': 'Sizes in the header',
  'not-a-number': 'Samples that are no numbers',
  'unreadable-part': 'Unreadable part',
  'layout-assumed': 'Layout not told',
  'measured-differently': 'Measured differently',
  silence: 'Silence',
  'drop-out': 'Drop-out',
  clipping: 'Clipping',
  'flat-top': 'Flat tops',
  'dc-offset': 'DC offset beyond 0.5 %',
  balance: 'Out of balance',
  correlation: 'Left against right',
  'dual-mono': 'The same left and right',
  'silent-audio-channel': 'Silent audio channel',
  'suspect-order': 'Suspect order',
  bandwidth: 'Narrow band',
  'line-up-tone': 'Line-up tone',
  'unused-bits': 'Unused bits',
  'declared-differs': 'Declared loudness differs',
};

/** A fact's value in words: '48 kHz', '24 bit', '5.1'. */
export function factText(fact: keyof typeof factNames, value: string): string {
  if (fact === 'sampleRateHz') return formatRate(Number(value));
  if (fact === 'bitDepth' || fact === 'effectiveBitDepth') return `${value} bit`;
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
      const number = (value: number) =>
        rule.metric === 'durationSeconds'
          ? formatDuration(value)
          : words.decimals === 0
            ? formatLevel(value, 0)
            : formatLimit(value);
      const unitOf = rule.metric === 'durationSeconds' || words.unit === '' ? '' : ` ${words.unit}`;
      const under = rule.silenceLevelDbfs
        ? `, under ${formatLevel(rule.silenceLevelDbfs, 0)} dBFS`
        : rule.clippedSamples
          ? `, of ${rule.clippedSamples} samples or more`
          : '';
      if (rule.atLeast === null) return `at most ${number(rule.atMost ?? 0)}${unitOf}${under}`;
      if (rule.atMost === null) return `at least ${number(rule.atLeast)}${unitOf}${under}`;
      return `${number(rule.atLeast)} to ${number(rule.atMost)}${unitOf}${under}`;
    }
    case 'oneOf':
      return rule.allowed.map((value) => factText(rule.fact, value)).join(' or ');
    case 'finding':
      return 'must not be';
  }
}
