/** Where measuring stands, in Redis for an expiring while: worth showing, not worth keeping. */
import { z } from 'zod';
import { redis } from '../redis.ts';

export const progressSchema = z.object({ secondsDone: z.number(), secondsTotal: z.number().nullable() });
export type Progress = z.infer<typeof progressSchema>;

export const progressKey = (deliverableId: string) => `progress:${deliverableId}`;
/** Told four times a second while it goes on; a worker that died leaves its last word for this long. */
const keptSeconds = 60;

/** Throws when Redis is away. */
export async function setProgress(deliverableId: string, progress: Progress): Promise<void> {
  await redis().set(progressKey(deliverableId), JSON.stringify(progress), 'EX', keptSeconds);
}

export async function clearProgress(deliverableId: string): Promise<void> {
  await redis().del(progressKey(deliverableId));
}

/** Progress by deliverable, of those that have any. Throws when Redis is away. */
export async function readProgress(deliverableIds: readonly string[]): Promise<Map<string, Progress>> {
  const found = new Map<string, Progress>();
  if (deliverableIds.length === 0) return found;
  const texts = await redis().mget(deliverableIds.map(progressKey));
  texts.forEach((text, i) => {
    if (text) found.set(deliverableIds[i], progressSchema.parse(JSON.parse(text)));
  });
  return found;
}
