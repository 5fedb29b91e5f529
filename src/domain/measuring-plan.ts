/** How a file is measured, as people and machines may ask for it: every check of a measuring plan, with its sentence. */
import { z } from 'zod';
import { speakers } from '../engine/layouts.ts';
import type { MeasuringPlan, Presentation } from '../engine/plan.ts';

const mostPresentations = 16;
const mostAudioChannels = 24;
const wholeNumber = 'Audio channels are counted in whole numbers from 0.';
const whichStream = 'Audio streams are counted in whole numbers from 0 to 63.';

export const presentationSchema: z.ZodType<Presentation> = z
  .object({
    name: z
      .string()
      .trim()
      .min(1, { error: 'Give each presentation a name.' })
      .max(60, { error: 'A name has 60 letters at the most.' }),
    audioChannels: z
      .array(
        z
          .number({ error: wholeNumber })
          .int({ error: wholeNumber })
          .min(0, { error: wholeNumber })
          .max(127, { error: 'No file has more than 128 audio channels.' }),
      )
      .min(1, { error: 'A presentation needs an audio channel at least.' })
      .max(mostAudioChannels, {
        error: `A presentation has ${mostAudioChannels} audio channels at the most.`,
      }),
    speakers: z.array(z.enum(speakers, { error: `A loudspeaker is one of ${speakers.join(', ')}.` })),
  })
  .refine((p) => p.speakers.length === p.audioChannels.length, {
    error: 'Say for each audio channel of a presentation which loudspeaker it feeds.',
    path: ['speakers'],
  })
  .refine((p) => new Set(p.audioChannels).size === p.audioChannels.length, {
    error: 'An audio channel stands twice in one presentation.',
    path: ['audioChannels'],
  })
  .refine(
    ({ speakers: named }) => {
      const known = named.filter((speaker) => speaker !== 'unknown');
      return new Set(known).size === known.length;
    },
    { error: 'Two audio channels of a presentation feed the same loudspeaker.', path: ['speakers'] },
  );

export const measuringPlanSchema: z.ZodType<MeasuringPlan> = z.object({
  stream: z
    .number({ error: whichStream })
    .int({ error: whichStream })
    .min(0, { error: whichStream })
    .max(63, { error: whichStream }),
  window: z
    .object({
      startSeconds: z.number().min(0, { error: 'The programme cannot begin before the file.' }),
      endSeconds: z.number().nullable(),
    })
    .refine((w) => w.endSeconds === null || w.endSeconds > w.startSeconds, {
      error: 'The programme must end after it begins.',
      path: ['endSeconds'],
    })
    .nullable(),
  presentations: z
    .array(presentationSchema)
    .min(1, { error: 'A file is measured as one presentation at least.' })
    .max(mostPresentations, { error: `A file has ${mostPresentations} presentations at the most.` })
    .refine((all) => new Set(all.map(({ name }) => name.toLowerCase())).size === all.length, {
      error: 'Two presentations have the same name.',
    })
    .nullable(),
});

/** What keeps a plan from fitting a file of so many audio channels and seconds; `null` where it fits. */
export function misfitOf(
  plan: MeasuringPlan,
  file: { channels: number; durationSeconds: number },
): string | null {
  const beyond = plan.presentations?.flatMap((p) => p.audioChannels).find((c) => c >= file.channels);
  if (beyond !== undefined)
    return `The file has ${file.channels} audio channels; number ${beyond + 1} is not among them.`;
  if (plan.window && plan.window.startSeconds >= file.durationSeconds)
    return `The file lasts ${file.durationSeconds.toFixed(3)} s; the programme cannot begin at ${plan.window.startSeconds.toFixed(3)} s.`;
  // What a frame of any rate rounds up to is no fault.
  if (plan.window?.endSeconds != null && plan.window.endSeconds > file.durationSeconds + 0.05)
    return `The file lasts ${file.durationSeconds.toFixed(3)} s; the programme cannot end at ${plan.window.endSeconds.toFixed(3)} s.`;
  return null;
}
