/** What changed from one delivery to the next, figure by figure. */
import type { SubmissionReport } from '@/domain/api/submissions.ts';
import { formatLevel, roundHalfAway } from '@/domain/figures-text.ts';

type Figures = SubmissionReport['figures'];

export interface Change {
  /** Key of the metric, as the rules of a spec name it. */
  metric: string;
  name: string;
  unit: string;
  before: number | null;
  after: number | null;
  beforeText: string;
  afterText: string;
  /** '+1.2', '−0.4', 'unchanged', or that there is nothing to compare. */
  changeText: string;
}

const read: { metric: string; name: string; unit: string; of: (figures: Figures) => number | null }[] = [
  {
    metric: 'integratedLufs',
    name: 'Integrated loudness',
    unit: 'LUFS',
    of: ({ loudness }) => loudness.integratedLufs,
  },
  { metric: 'rangeLu', name: 'Loudness range', unit: 'LU', of: ({ loudness }) => loudness.rangeLu },
  {
    metric: 'shortTermMaxLufs',
    name: 'Maximum short-term',
    unit: 'LUFS',
    of: ({ loudness }) => loudness.shortTermMaxLufs,
  },
  {
    metric: 'momentaryMaxLufs',
    name: 'Maximum momentary',
    unit: 'LUFS',
    of: ({ loudness }) => loudness.momentaryMaxLufs,
  },
  { metric: 'truePeakDbtp', name: 'Maximum true peak', unit: 'dBTP', of: ({ truePeak }) => truePeak.maxDbtp },
];

/** The change is that of the figures as they are shown, so that a reader can do the sum. */
export function changesBetween(before: Figures, after: Figures): Change[] {
  return read.map(({ of, ...metric }) => {
    const [was, is] = [of(before), of(after)];
    const step =
      was === null || is === null ? null : roundHalfAway(roundHalfAway(is, 1) - roundHalfAway(was, 1), 1);
    return {
      ...metric,
      before: was,
      after: is,
      beforeText: formatLevel(was),
      afterText: formatLevel(is),
      changeText:
        step === null
          ? 'nothing to compare'
          : step === 0
            ? 'unchanged'
            : `${step > 0 ? '+' : ''}${formatLevel(step)}`,
    };
  });
}
