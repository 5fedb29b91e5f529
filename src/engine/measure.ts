/** One whole measurement: a source of frames in; figures, findings and series of each presentation out. */
import { signalFindings } from './facts/findings.ts';
import { SignalObserver } from './facts/signal-facts.ts';
import type { Figures, Measurement, MeasurementSeries } from './figures.ts';
import { fromSpeakers } from './layouts.ts';
import { Meter, type Twin } from './meter.ts';
import { wholeFile, wholeLayout, type MeasuringPlan, type Presentation } from './plan.ts';
import { UnreadableError, type SampleSource } from './source.ts';

export interface MeasureOptions {
  plan?: MeasuringPlan;
  /** Seconds of programme measured, and in all (`null`: not known). Called once per block. */
  onProgress?: (secondsDone: number, secondsTotal: number | null) => void;
  signal?: AbortSignal;
  twin?: Twin;
}

export interface Measured {
  presentation: Presentation;
  measurement: Measurement;
  series: MeasurementSeries;
}

/** Measures every presentation of the plan in one pass. Throws UnreadableError, the source's errors, or the signal's reason. */
export async function measure(
  source: SampleSource,
  {
    plan = wholeFile,
    onProgress,
    signal = new AbortController().signal,
    twin = 'kernel',
  }: MeasureOptions = {},
): Promise<Measured[]> {
  const { format } = source;
  const rate = format.sampleRateHz;
  const start = plan.window?.startSeconds ?? 0;
  const end = plan.window?.endSeconds ?? null;
  const window = {
    startFrame: Math.round(start * rate),
    endFrame: end === null ? null : Math.round(end * rate),
  };
  const last = end ?? source.secondsTotal;
  const secondsTotal =
    last === null ? null : Math.max(0, Math.min(last, source.secondsTotal ?? last) - start);
  const parts = (plan.presentations ?? [wholeLayout(source.layout)]).map((presentation) => {
    const observer = new SignalObserver({ sampleRateHz: rate, speakers: presentation.speakers });
    const meter = new Meter(
      {
        sampleRateHz: rate,
        encoding: source.encoding,
        frameChannels: format.channels,
        audioChannels: presentation.audioChannels,
        speakers: presentation.speakers,
        secondsTotal,
        observers: [observer],
      },
      twin,
    );
    return { presentation, observer, meter };
  });
  // One presentation may be read straight into its meter's memory; several share what is read.
  const into = parts.length === 1 ? parts[0].meter.blocks : undefined;
  let done = 0;
  for await (const { bytes, frames } of source.blocks(signal, window, into)) {
    for (const { meter } of parts) meter.process(bytes, frames);
    done += frames;
    onProgress?.(done / rate, secondsTotal);
  }
  if (done === 0)
    throw new UnreadableError(
      'no-samples',
      plan.window
        ? 'The measured window holds not one sample of audio: it begins behind the end of the file.'
        : 'The file holds not one sample of audio.',
    );
  return parts.map(({ presentation, observer, meter }) => {
    const { series, findings, usedBits, means, ...rest } = meter.result();
    const { facts, silences } = observer.result({
      usedBits,
      means,
      samplePeaksDbfs: rest.figures.samplePeak.perChannelDbfs,
    });
    const figures: Figures = { ...rest.figures, windowStartSeconds: start, signal: facts };
    const { speakers } = presentation;
    const { bitDepth, declaredLoudness } = format;
    return {
      presentation,
      measurement: {
        format: {
          ...format,
          layout: plan.presentations ? fromSpeakers(presentation.speakers).name : format.layout,
          durationSeconds: plan.window ? (source.secondsTotal ?? 0) : done / rate,
        },
        figures,
        findings: [
          // Nothing is assumed where the plan says it.
          ...source.findings.filter(({ code }) => !plan.presentations || code !== 'layout-assumed'),
          ...findings,
          ...signalFindings({
            figures,
            facts,
            silences,
            speakers,
            bitDepth,
            // What a file declares is of the file: of several presentations it does not say which.
            declaredLoudness: parts.length === 1 ? declaredLoudness : undefined,
          }),
        ],
      },
      series,
    };
  });
}
