/** A draft as it is typed, and as the API takes it. Numbers are kept as text, so that nothing typed is lost. */
import { toNestErrors } from '@hookform/resolvers';
import type { FieldError, Resolver } from 'react-hook-form';
import type { z } from 'zod';
import { saveDraftSchema } from '@/domain/api/specs.ts';
import { formatLimit } from '@/domain/figures-text.ts';
import { rangeMetrics, type Rule, type SpecBody } from '@/domain/spec.ts';
import { clippedLengths, defaultSilence } from '@/engine/facts/thresholds.ts';
import { findingCodes } from '@/engine/figures.ts';

export interface RuleForm {
  id: string;
  kind: Rule['kind'];
  breach: Rule['breach'];
  measurementTolerance: string;
  targetLufs: string;
  toleranceAboveLu: string;
  toleranceBelowLu: string;
  metric: string;
  atLeast: string;
  atMost: string;
  judgeShortProgrammes: boolean;
  /** Of rules on silence; as text, for the list that offers it. */
  silenceLevelDbfs: string;
  /** Of rules on clipped runs, likewise. */
  clippedSamples: string;
  fact: string;
  /** Values with commas between. */
  allowed: string;
  code: string;
}

export interface DraftForm {
  unit: SpecBody['unit'];
  rounding: SpecBody['rounding'];
  mono: SpecBody['mono'];
  source: { document: string; edition: string; note: string };
  rules: RuleForm[];
  changeNote: string;
}
export type Draft = z.output<typeof saveDraftSchema>;

/** What a new rule can be about, by the value of the list that offers it. */
export const ruleSubjects = [
  'integratedLufs',
  ...rangeMetrics.filter((metric) => metric !== 'integratedLufs'),
  'sampleRateHz',
  'bitDepth',
  'layout',
  'container',
  'codec',
  'audioChannels',
  'effectiveBitDepth',
  'frameRate',
  'startTimecode',
  ...findingCodes,
] as const;
export type RuleSubject = (typeof ruleSubjects)[number];

const facts = {
  sampleRateHz: '48000',
  bitDepth: '24',
  layout: 'stereo, 5.1',
  container: 'WAV, BW64',
  codec: 'PCM',
  audioChannels: '2, 6',
  effectiveBitDepth: '24',
  frameRate: '25',
  startTimecode: '10:00:00:00',
} as const;
/** Upper limits to begin with; common practice, no source. The writer is expected to change them. */
const firstAtMost: Record<string, string> = {
  truePeakDbtp: '−1.0',
  samplePeakDbfs: '−1.0',
  rangeLu: '18.0',
  shortTermMaxLufs: '−18.0',
  momentaryMaxLufs: '−15.0',
  peakToLoudnessLu: '20.0',
  durationSeconds: '3600',
  downmixIntegratedLufs: '−23.0',
  downmixTruePeakDbtp: '−1.0',
  silenceHeadSeconds: '2.0',
  silenceTailSeconds: '2.0',
  silenceInsideSeconds: '2.0',
  dropOutCount: '0',
  clippedRunCount: '0',
  dcOffsetPercent: '0.5',
  balanceLu: '3.0',
  outOfPhasePercent: '5.0',
  lineUpToneDbfs: '−17.5',
};
const firstAtLeast: Record<string, string> = {
  balanceLu: '−3.0',
  correlationLowest: '−0.3',
  bandwidthHz: '17000',
  lineUpToneDbfs: '−18.5',
  bitRateKbps: '192',
};

export const isSilence = (metric: string): boolean => metric.startsWith('silence');
export const isClipping = (metric: string): boolean => metric === 'clippedRunCount';
export const isFact = (subject: string): subject is keyof typeof facts => subject in facts;
export const isFinding = (subject: string): boolean => (findingCodes as readonly string[]).includes(subject);

/** An id that no rule of the form has, made of what the rule is about. */
function freshId(subject: string, taken: readonly string[]): string {
  const base = subject
    .replace(/(Lufs|Dbtp|Dbfs|Lu|Seconds|Hz)$/, '')
    .replace(/[A-Z]/g, (letter) => `-${letter.toLowerCase()}`);
  let id = base;
  for (let n = 2; taken.includes(id); n++) id = `${base}-${n}`;
  return id;
}

const blank = {
  measurementTolerance: '0',
  targetLufs: '',
  toleranceAboveLu: '',
  toleranceBelowLu: '',
  metric: 'truePeakDbtp',
  atLeast: '',
  atMost: '',
  judgeShortProgrammes: false,
  silenceLevelDbfs: String(defaultSilence.levelDbfs),
  clippedSamples: String(clippedLengths[0]),
  fact: 'sampleRateHz',
  allowed: '',
  code: 'truncated',
};

export function newRule(subject: RuleSubject, taken: readonly string[]): RuleForm {
  const frame = { ...blank, id: freshId(subject, taken), breach: 'reject' as const };
  if (subject === 'integratedLufs')
    return {
      ...frame,
      kind: 'integrated',
      targetLufs: '−23.0',
      toleranceAboveLu: '1.0',
      toleranceBelowLu: '1.0',
    };
  if (isFact(subject)) return { ...frame, kind: 'oneOf', fact: subject, allowed: facts[subject] };
  if (isFinding(subject)) return { ...frame, kind: 'finding', code: subject };
  return {
    ...frame,
    kind: 'limits',
    metric: subject,
    atLeast: firstAtLeast[subject] ?? '',
    atMost: firstAtMost[subject] ?? '',
  };
}

const written = (value: number | null) => (value === null ? '' : formatLimit(value));

function ruleForm(rule: Rule): RuleForm {
  const frame = {
    ...blank,
    id: rule.id,
    breach: rule.breach,
    measurementTolerance: rule.measurementTolerance === 0 ? '0' : written(rule.measurementTolerance),
  };
  switch (rule.kind) {
    case 'integrated':
      return {
        ...frame,
        kind: rule.kind,
        targetLufs: written(rule.targetLufs),
        toleranceAboveLu: written(rule.toleranceAboveLu),
        toleranceBelowLu: written(rule.toleranceBelowLu),
      };
    case 'limits':
      return {
        ...frame,
        kind: rule.kind,
        metric: rule.metric,
        atLeast: written(rule.atLeast),
        atMost: written(rule.atMost),
        judgeShortProgrammes: rule.judgeShortProgrammes,
        silenceLevelDbfs: String(rule.silenceLevelDbfs ?? defaultSilence.levelDbfs),
        clippedSamples: String(rule.clippedSamples ?? clippedLengths[0]),
      };
    case 'oneOf':
      return { ...frame, kind: rule.kind, fact: rule.fact, allowed: rule.allowed.join(', ') };
    case 'finding':
      return { ...frame, kind: rule.kind, code: rule.code };
  }
}

export const formOf = (body: SpecBody, changeNote: string): DraftForm => ({
  unit: body.unit,
  rounding: body.rounding,
  mono: body.mono,
  source: body.source ?? { document: '', edition: '', note: '' },
  rules: body.rules.map(ruleForm),
  changeNote,
});

/** The number that a text writes, with either minus sign and a point or comma; `null` for none, NaN for anything else. */
export function numberOf(text: string): number | null {
  const plain = text.trim().replace('\u2212', '-').replace(',', '.');
  if (plain === '') return null;
  return /^[+-]?\d+(\.\d+)?$/.test(plain) ? Number(plain) : Number.NaN;
}

function candidateRule(rule: RuleForm): unknown {
  const frame = {
    id: rule.id,
    kind: rule.kind,
    breach: rule.breach,
    measurementTolerance: numberOf(rule.measurementTolerance) ?? 0,
  };
  switch (rule.kind) {
    case 'integrated':
      return {
        ...frame,
        targetLufs: numberOf(rule.targetLufs),
        toleranceAboveLu: numberOf(rule.toleranceAboveLu),
        toleranceBelowLu: numberOf(rule.toleranceBelowLu),
      };
    case 'limits':
      return {
        ...frame,
        metric: rule.metric,
        atLeast: numberOf(rule.atLeast),
        atMost: numberOf(rule.atMost),
        judgeShortProgrammes: rule.judgeShortProgrammes,
        ...(isSilence(rule.metric) && { silenceLevelDbfs: numberOf(rule.silenceLevelDbfs) }),
        ...(isClipping(rule.metric) && { clippedSamples: numberOf(rule.clippedSamples) }),
      };
    case 'oneOf':
      return {
        ...frame,
        fact: rule.fact,
        allowed: rule.allowed
          .split(',')
          .map((value) => value.trim())
          .filter((value) => value !== ''),
      };
    case 'finding':
      return { ...frame, code: rule.code };
  }
}

const candidateOf = ({ changeNote, source, rules, ...settings }: DraftForm) => ({
  changeNote,
  body: {
    ...settings,
    source: Object.values(source).some((text) => text.trim() !== '') ? source : null,
    rules: rules.map(candidateRule),
  },
});

/** What is wrong, for a person. */
function sentenceOf(issue: z.core.$ZodIssue): string {
  if (issue.code === 'invalid_type') return 'Write a number, such as −23 or 0.5.';
  const isNumber = 'origin' in issue && issue.origin === 'number';
  if (issue.code === 'too_small')
    return isNumber ? `Not under ${formatLimit(Number(issue.minimum))}.` : 'Write something here.';
  if (issue.code === 'too_big')
    return isNumber ? `Not above ${formatLimit(Number(issue.maximum))}.` : 'This is too long.';
  return issue.message;
}

/** The name of the input at fault: a rule's own fault is shown at its upper limit. */
function inputOf(path: readonly PropertyKey[]): string {
  const [first, ...rest] = path;
  const within = first === 'body' ? rest : path;
  if (within[0] === 'rules' && within.length === 2) return `rules.${String(within[1])}.atMost`;
  if (within[0] === 'rules' && within.length > 3) return within.slice(0, 3).join('.');
  return within.map(String).join('.');
}

/** The draft that the form holds, or what is wrong by the name of the input. */
export function readDraft(form: DraftForm): { draft: Draft } | { faults: Record<string, string> } {
  const parsed = saveDraftSchema.safeParse(candidateOf(form));
  if (parsed.success) return { draft: parsed.data };
  const faults: Record<string, string> = {};
  for (const issue of parsed.error.issues) faults[inputOf(issue.path)] ??= sentenceOf(issue);
  return { faults };
}

export const draftResolver: Resolver<DraftForm, unknown, Draft> = (form, _context, options) => {
  const read = readDraft(form);
  if ('draft' in read) return { values: read.draft, errors: {} };
  const flat: Record<string, FieldError> = Object.fromEntries(
    Object.entries(read.faults).map(([name, message]) => [name, { type: 'value', message }]),
  );
  return { values: {}, errors: toNestErrors(flat, options) };
};
