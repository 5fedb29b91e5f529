/** The facts of a signal as the API gives them; what each is stands beside its type in the engine. */
import { z } from 'zod';
import type { SignalFacts } from '../../engine/figures.ts';

const value = z.number().nullable();
const places = {
  count: z.number().int(),
  listed: z.array(
    z.object({ audioChannel: z.number().int(), atSeconds: z.number(), lengthSeconds: z.number() }),
  ),
};
const clippingSchema = z.object({
  ...places,
  longestSamples: z.number().int(),
  atLeast: z.array(z.object({ samples: z.number().int(), count: z.number().int() })).optional(),
});

export const signalFactsSchema: z.ZodType<SignalFacts> = z.object({
  silence: z.array(
    z.object({
      levelDbfs: z.number(),
      headSeconds: z.number(),
      tailSeconds: z.number(),
      longestInsideSeconds: z.number(),
      longestInsideAtSeconds: value,
    }),
  ),
  dropOuts: z.object(places),
  clipping: clippingSchema,
  flatTops: clippingSchema,
  dcOffsetPercent: z.array(z.number()),
  stereo: z
    .object({
      balanceLu: value,
      correlationLowest: value,
      correlationLowestAtSeconds: value,
      belowZeroPercent: value,
      dualMono: z.boolean().nullable(),
    })
    .optional(),
  silentAudioChannels: z.array(z.number().int()),
  suspectOrder: z.enum(['lfe-full-band', 'centre-silent']).nullable(),
  bandwidthHz: value,
  lineUpTone: z
    .object({ hz: z.number(), levelDbfs: z.number(), startSeconds: z.number(), endSeconds: z.number() })
    .nullable(),
  effectiveBitDepth: value,
});
