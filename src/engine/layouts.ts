/** Audio-channel layouts and their weights: 1.41 where |elevation| < 30 and 60 <= |azimuth| <= 120 degrees, else 1.0; LFE 0 (BS.1770-5 Annex 3, Table 4). */

/** Loudspeaker labels as the trade writes them; in 7.1 the sides are Lss/Rss and the rears Lrs/Rrs. */
export const speakers = [
  'M',
  'L',
  'R',
  'C',
  'LFE',
  'Ls',
  'Rs',
  'Lss',
  'Rss',
  'Lrs',
  'Rrs',
  'Cs',
  'Lc',
  'Rc',
  'Ltf',
  'Rtf',
  'Ltr',
  'Rtr',
  'Ctf',
  'Ctr',
  'Tc',
  'unknown',
] as const;
export type Speaker = (typeof speakers)[number];

const beside = new Set<Speaker>(['Ls', 'Rs', 'Lss', 'Rss']);

/** Weight of one audio channel's mean square. */
export const weightOf = (speaker: Speaker): number =>
  speaker === 'LFE' ? 0 : beside.has(speaker) ? 1.41 : 1;

export interface Layout {
  /** 'mono', 'stereo', '3.0', '5.0', '5.1', '7.1', '5.1.4', '7.1.4' or 'N channels'. */
  name: string;
  speakers: readonly Speaker[];
  /** True where the file does not say and the usual order was taken (BS.1770 and EBU R 123: L R C LFE Ls Rs). */
  assumed: boolean;
}

const named: Record<string, readonly Speaker[]> = {
  mono: ['M'],
  stereo: ['L', 'R'],
  '3.0': ['L', 'R', 'C'],
  '5.0': ['L', 'R', 'C', 'Ls', 'Rs'],
  '5.1': ['L', 'R', 'C', 'LFE', 'Ls', 'Rs'],
  // In the order of the WAVE mask 0x63F: backs before sides.
  '7.1': ['L', 'R', 'C', 'LFE', 'Lrs', 'Rrs', 'Lss', 'Rss'],
  '5.1.4': ['L', 'R', 'C', 'LFE', 'Ls', 'Rs', 'Ltf', 'Rtf', 'Ltr', 'Rtr'],
  '7.1.4': ['L', 'R', 'C', 'LFE', 'Lrs', 'Rrs', 'Lss', 'Rss', 'Ltf', 'Rtf', 'Ltr', 'Rtr'],
};
const usualByCount: Record<number, string> = {
  1: 'mono',
  2: 'stereo',
  3: '3.0',
  5: '5.0',
  6: '5.1',
  8: '7.1',
  10: '5.1.4',
  12: '7.1.4',
};

/** Loudspeakers of a WAVE channel mask by bit (mmreg's order; from a secondary source). */
const maskSpeakers: readonly Speaker[] = [
  'L',
  'R',
  'C',
  'LFE',
  'Lrs',
  'Rrs',
  'Lc',
  'Rc',
  'Cs',
  'Lss',
  'Rss',
  'Tc',
  'Ltf',
  'Ctf',
  'Rtf',
  'Ltr',
  'Ctr',
  'Rtr',
];

const sameSet = (a: readonly Speaker[], b: readonly Speaker[]) =>
  a.length === b.length && a.every((s) => b.includes(s));

/** A layout from speakers in file order; names it where it is one of the known. */
export function fromSpeakers(speakers: readonly Speaker[]): Layout {
  const one = speakers.length === 1 && speakers[0] !== 'LFE';
  if (one) return { name: 'mono', speakers: ['M'], assumed: false };
  const name = Object.keys(named).find((key) => sameSet(named[key], speakers));
  return { name: name ?? `${speakers.length} channels`, speakers, assumed: false };
}

/** The usual layout of so many audio channels, told as assumed from three on: one and two say enough by their count. */
export function layoutOfCount(audioChannels: number): Layout {
  const name = usualByCount[audioChannels];
  if (!name)
    return {
      name: `${audioChannels} channels`,
      speakers: Array.from({ length: audioChannels }, () => 'unknown' as const),
      assumed: true,
    };
  return { name, speakers: named[name], assumed: audioChannels > 2 };
}

/** The layout that a WAVE channel mask tells; a mask that does not fit the count says nothing. */
export function layoutOfMask(mask: number, audioChannels: number): Layout {
  let speakers = maskSpeakers.filter((_, bit) => mask & (1 << bit));
  if (speakers.length !== audioChannels) return layoutOfCount(audioChannels);
  // With one pair of surrounds, back or side, that pair is Ls and Rs (both 5.1 pairings).
  const pair = (a: Speaker, b: Speaker) => speakers.includes(a) && speakers.includes(b);
  if (pair('Lrs', 'Rrs') !== pair('Lss', 'Rss'))
    speakers = speakers.map((s) =>
      s === 'Lrs' || s === 'Lss' ? 'Ls' : s === 'Rrs' || s === 'Rss' ? 'Rs' : s,
    );
  return fromSpeakers(speakers);
}

/** Names of a decoder's layouts in its native order. */
const decoderLayouts: Record<string, readonly Speaker[]> = {
  mono: ['M'],
  stereo: ['L', 'R'],
  '3.0': named['3.0'],
  '5.0': named['5.0'],
  '5.0(side)': named['5.0'],
  '5.1': named['5.1'],
  '5.1(side)': named['5.1'],
  '7.1': named['7.1'],
  '5.1.4': named['5.1.4'],
  '7.1.4': named['7.1.4'],
};

/** The layout that a decoder names ('5.1(side)'), or the usual one of the count where it names none. */
export function layoutOfDecoder(name: string | undefined, audioChannels: number): Layout {
  const speakers = name === undefined ? undefined : decoderLayouts[name];
  return speakers?.length === audioChannels ? fromSpeakers(speakers) : layoutOfCount(audioChannels);
}

/** Weights for the meter. A layout that is not known is measured with every audio channel at 1.0. */
export const weightsOf = (layout: Layout): number[] => layout.speakers.map(weightOf);
