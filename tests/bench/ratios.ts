/** The rows that are ratios to ffmpeg, each on a file made for it. */
import { rmSync } from 'node:fs';
import { join } from 'node:path';
import { levelOf, type Level } from './figures-read.ts';
import type { Recipe } from './material.ts';
import { bareDecode, ebur128, type Programs } from './programs.ts';
import { bestOf, time } from './timing.ts';
import { writeWave } from './wave-file.ts';

export interface RatioRow {
  name: string;
  label: string;
  sound: Omit<Recipe, 'seconds'>;
  /** Coded as MP3, and held against ffmpeg's bare decode. */
  isMp3?: boolean;
  /** Shortest times ours that ffmpeg must take; for an MP3 the longest times ffmpeg's that ours may. */
  asked?: number;
}

export interface RatioResult extends Level {
  name: string;
  label: string;
  seconds: number;
  isMp3: boolean;
  oursSeconds: number;
  ffmpegSeconds: number;
  /** Of reading and converting alone; `null` where a decoder stands before it. */
  convertSeconds: number | null;
  oursCpuSeconds: number | null;
  ffmpegCpuSeconds: number | null;
  oursMegabytes: number | null;
  ffmpegMegabytes: number | null;
  /** ffmpeg's time by ours; of an MP3 ours by ffmpeg's. */
  ratio: number;
  asked: number | null;
}

const stereo = { layout: 'stereo', sampleRateHz: 48_000 } as const;
export const ratioRows: readonly RatioRow[] = [
  { name: 'broadcast', label: 'stereo, broadcast level', sound: { kind: 'broadcast', ...stereo }, asked: 10 },
  { name: 'podcast', label: 'stereo, hot podcast', sound: { kind: 'podcast', ...stereo }, asked: 10 },
  {
    name: 'mp3',
    label: 'stereo MP3 (podcast)',
    sound: { kind: 'podcast', ...stereo },
    isMp3: true,
    asked: 1.35,
  },
  {
    name: 'surround',
    label: '5.1, broadcast level',
    sound: { kind: 'broadcast', layout: '5.1', sampleRateHz: 48_000 },
  },
  {
    name: 'high',
    label: 'stereo 96 kHz, broadcast level',
    sound: { kind: 'broadcast', layout: 'stereo', sampleRateHz: 96_000 },
  },
  { name: 'pink', label: 'stereo, pink noise', sound: { kind: 'pink', ...stereo } },
  { name: 'white', label: 'stereo, white noise', sound: { kind: 'white', ...stereo } },
];

/** Makes the row's file, times ours and ffmpeg in turn, and removes the file. */
export async function measureRow(
  row: RatioRow,
  seconds: number,
  rounds: number,
  folder: string,
  programs: Programs,
): Promise<RatioResult> {
  const wave = join(folder, `${row.name}.wav`);
  const mp3 = join(folder, `${row.name}.mp3`);
  try {
    writeWave(wave, { ...row.sound, seconds });
    if (row.isMp3) {
      const args = ['-nostdin', '-v', 'error', '-y', '-i', wave, '-c:a', 'libmp3lame', '-b:a', '192k', mp3];
      await time({ program: 'ffmpeg', args });
      rmSync(wave);
    }
    const file = row.isMp3 ? mp3 : wave;
    const [ours, theirs, alone] = await bestOf(
      rounds,
      row.isMp3
        ? [programs.measure(file), bareDecode(file)]
        : [programs.measure(file), ebur128(file), programs.convertAlone(file)],
      row.isMp3,
    );
    return {
      name: row.name,
      label: row.label,
      seconds,
      isMp3: row.isMp3 ?? false,
      ...levelOf(ours.stdout, seconds),
      oursSeconds: ours.seconds,
      ffmpegSeconds: theirs.seconds,
      convertSeconds: alone?.seconds ?? null,
      oursCpuSeconds: ours.cpuSeconds,
      ffmpegCpuSeconds: theirs.cpuSeconds,
      oursMegabytes: ours.peakMegabytes,
      ffmpegMegabytes: theirs.peakMegabytes,
      ratio: row.isMp3 ? ours.seconds / theirs.seconds : theirs.seconds / ours.seconds,
      asked: row.asked ?? null,
    };
  } finally {
    for (const file of [wave, mp3]) rmSync(file, { force: true });
  }
}
