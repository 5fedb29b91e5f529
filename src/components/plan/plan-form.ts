/** The form of a measuring plan: what a person has chosen and typed, and the plan that it makes. */
import type { DeliverableReport } from '@/domain/api/deliverables.ts';
import { fileClock, readTimeInFile, timeInFile, type FileClock } from '@/domain/file-clock.ts';
import { measuringPlanSchema, misfitOf } from '@/domain/measuring-plan.ts';
import type { Speaker } from '@/engine/layouts.ts';
import type { MeasuringPlan, Presentation } from '@/engine/plan.ts';
import { frameRates, secondsOfFrames, type FrameRateName } from '@/engine/timecode.ts';

export type Format = NonNullable<DeliverableReport['file']>['format'];

/** One presentation in the grid: the loudspeaker that each audio channel of the file feeds in it, if any. */
export interface Column {
  name: string;
  speakers: (Speaker | null)[];
}

export interface PlanForm {
  stream: number;
  /** Chosen where the file tells none. */
  frameRate: FrameRateName | null;
  /** As typed; '' is the file's own begin and end. */
  from: string;
  to: string;
  /** What filled the grid: 'told' (as the file tells), the id of a choice, or 'own'. */
  choice: string;
  columns: Column[];
}

/** Audio channels of the chosen stream. */
export const channelsOf = (format: Format, stream: number): number =>
  format.streams?.[stream]?.channels ?? format.channels;

export const clockOf = (format: Format, form: Pick<PlanForm, 'frameRate'>): FileClock =>
  fileClock(format, form.frameRate);

export const columnsOf = (presentations: readonly Presentation[], channels: number): Column[] =>
  presentations.map(({ name, audioChannels, speakers }) => {
    const all = new Array<Speaker | null>(channels).fill(null);
    audioChannels.forEach((channel, i) => (all[channel] = speakers[i]));
    return { name, speakers: all };
  });

/** The form that shows a plan. */
export function formOf(plan: MeasuringPlan, frameRate: FrameRateName | null, format: Format): PlanForm {
  const clock = clockOf(format, { frameRate });
  const { window, presentations, stream } = plan;
  return {
    stream,
    frameRate,
    from: window && window.startSeconds > 0 ? timeInFile(clock, window.startSeconds) : '',
    to: window && window.endSeconds !== null ? timeInFile(clock, window.endSeconds) : '',
    choice: presentations ? 'own' : 'told',
    columns: presentations ? columnsOf(presentations, channelsOf(format, stream)) : [],
  };
}

/** The form under another frame rate, with the times that were typed written anew where they can be read. */
export function withRate(form: PlanForm, frameRate: FrameRateName | null, format: Format): PlanForm {
  const [before, after] = [clockOf(format, form), clockOf(format, { frameRate })];
  const rewritten = (text: string) => {
    const read = readTimeInFile(before, text);
    return 'seconds' in read ? timeInFile(after, read.seconds) : text;
  };
  return { ...form, frameRate, from: rewritten(form.from), to: rewritten(form.to) };
}

/** The first time that the clock can write at or after these seconds of the file. */
export function nextTime(clock: FileClock, seconds: number): string {
  if (clock.rate === null) return timeInFile(clock, Math.ceil(seconds * 1000 - 1e-6) / 1000);
  const { numerator, denominator } = frameRates[clock.rate];
  const frame = Math.ceil((seconds * numerator) / denominator - 1e-6);
  return timeInFile(clock, secondsOfFrames(frame, clock.rate));
}

export type Made =
  { plan: MeasuringPlan } | { fault: string; field: 'from' | 'to' | 'presentations' | 'plan' };

function windowOf(form: PlanForm, clock: FileClock): { window: MeasuringPlan['window'] } | Made {
  const read = { from: 0, to: null as number | null };
  for (const field of ['from', 'to'] as const) {
    if (form[field].trim() === '') continue;
    const time = readTimeInFile(clock, form[field]);
    if ('fault' in time) return { fault: time.fault, field };
    read[field] = time.seconds;
  }
  const isWhole = read.from === 0 && read.to === null;
  return { window: isWhole ? null : { startSeconds: read.from, endSeconds: read.to } };
}

/** The plan that the form makes, or what is wrong with it and where. */
export function planOf(form: PlanForm, format: Format): Made {
  const window = windowOf(form, clockOf(format, form));
  if (!('window' in window)) return window;
  const presentations =
    form.choice === 'told'
      ? null
      : form.columns.map(({ name, speakers }) => {
          const fed = speakers.flatMap((speaker, channel) => (speaker ? [{ speaker, channel }] : []));
          return { name, audioChannels: fed.map((f) => f.channel), speakers: fed.map((f) => f.speaker) };
        });
  const parsed = measuringPlanSchema.safeParse({ stream: form.stream, ...window, presentations });
  if (!parsed.success) {
    const [issue] = parsed.error.issues;
    const field =
      issue.path[0] === 'window' ? 'to' : issue.path[0] === 'presentations' ? 'presentations' : 'plan';
    return { fault: issue.message, field };
  }
  const misfit = misfitOf(parsed.data, {
    channels: channelsOf(format, form.stream),
    durationSeconds: format.durationSeconds,
  });
  return misfit === null ? { plan: parsed.data } : { fault: misfit, field: 'plan' };
}
