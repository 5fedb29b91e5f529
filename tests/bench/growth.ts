/** How time and memory grow with the length of a programme. */
import { rmSync } from 'node:fs';
import { join } from 'node:path';
import { levelOf } from './figures-read.ts';
import type { Programs } from './programs.ts';
import { bestOf, time } from './timing.ts';
import { dataBytesOf, writeWave } from './wave-file.ts';

export interface GrowthResult {
  minutes: number;
  gigabytes: number;
  oursSeconds: number;
  oursMegabytes: number | null;
}

const sound = { kind: 'broadcast', layout: 'stereo', sampleRateHz: 48_000 } as const;

/** One length: 8 h are an RF64 of 8.3 GB. */
export async function measureLength(
  minutes: number,
  rounds: number,
  folder: string,
  programs: Programs,
): Promise<GrowthResult> {
  const file = join(folder, `${minutes}-minutes.wav`);
  const recipe = { ...sound, seconds: minutes * 60 };
  try {
    writeWave(file, recipe);
    const [ours] = await bestOf(rounds, [programs.measure(file)]);
    levelOf(ours.stdout, recipe.seconds);
    return {
      minutes,
      gigabytes: dataBytesOf(recipe) / 1e9,
      oursSeconds: ours.seconds,
      oursMegabytes: ours.peakMegabytes,
    };
  } finally {
    rmSync(file, { force: true });
  }
}

/** Memory of the process that has next to nothing to measure, 1 s: the least of some runs. */
export async function idleMegabytes(folder: string, programs: Programs): Promise<number | null> {
  const file = join(folder, 'second.wav');
  try {
    writeWave(file, { ...sound, kind: 'pink', seconds: 1 });
    const peaks: number[] = [];
    for (let run = 0; run < 5; run++) {
      const { peakMegabytes } = await time(programs.measure(file));
      if (peakMegabytes !== null) peaks.push(peakMegabytes);
    }
    return peaks.length === 0 ? null : Math.min(...peaks);
  } finally {
    rmSync(file, { force: true });
  }
}
