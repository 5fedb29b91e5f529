/** Figures that a bench measured before a file was sent, and how those of the service compare with them. */
import { z } from 'zod';
import type { Finding, Measurement } from '../engine/figures.ts';
import { formatLevel, formatTimecode } from './figures-text.ts';

const level = z.number().min(-1000).max(1000).nullable();
const levels = z.array(level).max(128);

/** What travels with an upload. */
export const benchFiguresSchema = z.object({
  engineVersion: z.string().min(1).max(40),
  /** 'engine': the samples were read by the engine; 'browser': the browser decoded them, so they may be others. */
  decodedBy: z.enum(['engine', 'browser']),
  loudness: z.object({
    integratedLufs: level,
    relativeThresholdLufs: level,
    rangeLu: level,
    rangeLowLufs: level,
    rangeHighLufs: level,
    momentaryMaxLufs: level,
    shortTermMaxLufs: level,
    dualMonoIntegratedLufs: level.optional(),
  }),
  truePeak: z.object({ maxDbtp: level, perChannelDbtp: levels }),
  samplePeak: z.object({ maxDbfs: level, perChannelDbfs: levels }),
  measuredSeconds: z.number().nonnegative(),
});
export type BenchFigures = z.infer<typeof benchFiguresSchema>;

/** The bench's figures of a measurement, as they are sent. */
export function benchFiguresOf(
  { figures }: Pick<Measurement, 'figures'>,
  engineVersion: string,
  decodedBy: BenchFigures['decodedBy'],
): BenchFigures {
  const { loudness, truePeak, samplePeak, measuredSeconds } = figures;
  return benchFiguresSchema.parse({
    engineVersion,
    decodedBy,
    loudness,
    truePeak,
    samplePeak,
    measuredSeconds,
  });
}

/** Figures further apart than this differ; the same engine on the same samples gives the same to the last bit. */
const sameWithin = 0.001;

type Compared = Pick<Measurement['figures'], 'loudness' | 'truePeak' | 'samplePeak' | 'measuredSeconds'>;

const loudnessNames: Record<keyof BenchFigures['loudness'], [name: string, unit: string]> = {
  integratedLufs: ['integrated loudness', 'LUFS'],
  dualMonoIntegratedLufs: ['integrated loudness as dual mono', 'LUFS'],
  relativeThresholdLufs: ['relative gate', 'LUFS'],
  rangeLu: ['loudness range', 'LU'],
  rangeLowLufs: ['lower end of the range', 'LUFS'],
  rangeHighLufs: ['upper end of the range', 'LUFS'],
  momentaryMaxLufs: ['maximum momentary', 'LUFS'],
  shortTermMaxLufs: ['maximum short-term', 'LUFS'],
};

interface Pair {
  name: string;
  unit: string;
  bench: number | null | undefined;
  service: number | null | undefined;
}

function pairsOf(bench: Compared, service: Compared): Pair[] {
  const each = (name: string, unit: string, ours: (number | null)[], theirs: (number | null)[]): Pair[] =>
    Array.from({ length: Math.max(ours.length, theirs.length) }, (_, i) => ({
      name: `${name} of audio channel ${i + 1}`,
      unit,
      bench: ours[i],
      service: theirs[i],
    }));
  return [
    ...Object.entries(loudnessNames).map(([key, [name, unit]]): Pair => {
      const figure = key as keyof BenchFigures['loudness'];
      return { name, unit, bench: bench.loudness[figure], service: service.loudness[figure] };
    }),
    {
      name: 'maximum true peak',
      unit: 'dBTP',
      bench: bench.truePeak.maxDbtp,
      service: service.truePeak.maxDbtp,
    },
    {
      name: 'maximum sample peak',
      unit: 'dBFS',
      bench: bench.samplePeak.maxDbfs,
      service: service.samplePeak.maxDbfs,
    },
    { name: 'length', unit: 's', bench: bench.measuredSeconds, service: service.measuredSeconds },
    ...each('true peak', 'dBTP', bench.truePeak.perChannelDbtp, service.truePeak.perChannelDbtp),
    ...each('sample peak', 'dBFS', bench.samplePeak.perChannelDbfs, service.samplePeak.perChannelDbfs),
  ];
}

const differs = ({ bench, service }: Pair) =>
  (bench ?? null) === null || (service ?? null) === null
    ? (bench ?? null) !== (service ?? null)
    : Math.abs((bench as number) - (service as number)) > sameWithin;

const inWords = (value: number | null | undefined, unit: string) =>
  value === null || value === undefined
    ? 'no value'
    : unit === 's'
      ? formatTimecode(value)
      : `${formatLevel(value, 3)} ${unit}`;

/** How the two compare, with a sentence that says it. */
export const benchComparisonSchema = z.object({
  kind: z.enum(['same', 'differs', 'not-compared']),
  message: z.string(),
});
export type BenchComparison = z.infer<typeof benchComparisonSchema>;

/**
 * Holds the service's measurement of a whole file against what the bench said of it. Compared within 0.001 (LU, dB, s),
 * where both are of the same engine and both read the samples by it.
 */
export function compareWithBench(
  bench: BenchFigures,
  service: Compared,
  serviceEngine: string,
): BenchComparison {
  if (bench.engineVersion !== serviceEngine)
    return {
      kind: 'not-compared',
      message: `The bench measured with engine ${bench.engineVersion} and the service with ${serviceEngine}, so the two are not compared.`,
    };
  if (bench.decodedBy === 'browser')
    return {
      kind: 'not-compared',
      message:
        'On the bench the browser decoded the file, and its figures were a preview, so the two are not compared.',
    };
  const apart = pairsOf(bench, service).filter(differs);
  if (apart.length === 0)
    return {
      kind: 'same',
      message:
        'Measured on the bench before it was sent, and again by the service: the figures are the same.',
    };
  const [first] = apart;
  const others = apart.length === 1 ? '' : ` ${apart.length - 1} more of its figures differ.`;
  return {
    kind: 'differs',
    message: `Measured differently on the bench and by the service: ${first.name} ${inWords(first.bench, first.unit)} on the bench, ${inWords(first.service, first.unit)} by the service.${others} The service's figures stand; was it the same file?`,
  };
}

/** The finding for a measurement that differs from the bench's; `null` otherwise. */
export function measuredDifferently(
  bench: BenchFigures,
  service: Compared,
  serviceEngine: string,
): Finding | null {
  const comparison = compareWithBench(bench, service, serviceEngine);
  return comparison.kind === 'differs' ? { code: 'measured-differently', message: comparison.message } : null;
}
