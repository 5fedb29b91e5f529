/** One whole measurement: a source of samples in, figures, findings and series out. */
import type { Measurement, MeasurementSeries } from './figures.ts';
import { weightsOf } from './layouts.ts';
import { Meter } from './meter.ts';
import { UnreadableError, type SampleSource } from './source.ts';

export interface MeasureOptions {
  /** Seconds of programme measured, and in all (`null`: not known). Called once per block. */
  onProgress?: (secondsDone: number, secondsTotal: number | null) => void;
  signal?: AbortSignal;
}

/** Measures from the first sample to the last. Throws UnreadableError, the source's errors, or the signal's reason. */
export async function measure(
  source: SampleSource,
  { onProgress, signal = new AbortController().signal }: MeasureOptions = {},
): Promise<{ measurement: Measurement; series: MeasurementSeries }> {
  const meter = new Meter({ sampleRateHz: source.format.sampleRateHz, weights: weightsOf(source.layout) });
  for await (const { planar, count } of source.blocks(signal)) {
    meter.process(planar, count);
    onProgress?.(meter.samples / source.format.sampleRateHz, source.secondsTotal);
  }
  if (meter.samples === 0) throw new UnreadableError('no-samples', 'The file holds not one sample of audio.');
  const { figures, series } = meter.result();
  return {
    measurement: {
      format: { ...source.format, durationSeconds: figures.measuredSeconds },
      figures,
      findings: source.findings,
    },
    series,
  };
}
