/** How a file is measured; what changes it makes another measurement. */
import type { Layout, Speaker } from './layouts.ts';

/** A group of a file's audio channels that plays as one. */
export interface Presentation {
  name: string;
  /** Audio channels of the file, from 0. */
  audioChannels: number[];
  /** One for each of them. */
  speakers: Speaker[];
}

export interface MeasuringPlan {
  /** Which audio stream of a MOV, MP4 or MXF, from 0 among its audio streams. */
  stream: number;
  /** Seconds of the file that are programme; `null`: the whole file. */
  window: { startSeconds: number; endSeconds: number | null } | null;
  /** `null`: one presentation of all audio channels, in the order that the file tells or that is assumed. */
  presentations: Presentation[] | null;
}

export const wholeFile: MeasuringPlan = { stream: 0, window: null, presentations: null };

/** All audio channels of a file as one presentation. */
export const wholeLayout = (layout: Layout): Presentation => ({
  name: layout.name,
  audioChannels: layout.speakers.map((_, i) => i),
  speakers: [...layout.speakers],
});
