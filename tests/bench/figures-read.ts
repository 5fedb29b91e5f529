/** What the bench reads of the command's JSON. */
import { z } from 'zod';

const measured = z.array(
  z.object({
    loudness: z.object({ integratedLufs: z.number().nullable() }),
    truePeak: z.object({ maxDbtp: z.number().nullable() }),
    format: z.object({ durationSeconds: z.number() }),
  }),
);

export interface Level {
  integratedLufs: number | null;
  truePeakDbtp: number | null;
}

/** Throws where the file was not measured, or not to its end: a fast measurement of a part is none. */
export function levelOf(stdout: string, seconds: number): Level {
  const [{ loudness, truePeak, format }] = measured.parse(JSON.parse(stdout));
  // An MP3 has silence of its encoder at both ends.
  if (Math.abs(format.durationSeconds - seconds) > 0.2)
    throw new Error(`${format.durationSeconds} s were measured of ${seconds} s.`);
  return { integratedLufs: loudness.integratedLufs, truePeakDbtp: truePeak.maxDbtp };
}
