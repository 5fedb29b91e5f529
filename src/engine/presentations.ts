/** How the audio channels of a file may play together: orders where the file does not say, and allocations of many tracks. */
import { layoutOfCount, type Speaker } from './layouts.ts';
import type { Presentation } from './plan.ts';

export interface Choice {
  id: string;
  label: string;
  presentations: Presentation[];
}

const stereo: readonly Speaker[] = ['L', 'R'];
const surround: readonly Speaker[] = ['L', 'R', 'C', 'LFE', 'Ls', 'Rs'];

/** Orders of one programme that a person may say where the file does not; film order and the like from memory. */
const orders: readonly { id: string; label: string; speakers: readonly Speaker[] }[] = [
  { id: 'mono', label: 'Mono', speakers: ['M'] },
  { id: 'stereo', label: 'Stereo: L R', speakers: stereo },
  { id: '3.0', label: '3.0: L R C', speakers: ['L', 'R', 'C'] },
  { id: '3.0-film', label: '3.0, film order: L C R', speakers: ['L', 'C', 'R'] },
  { id: '5.0', label: '5.0: L R C Ls Rs', speakers: ['L', 'R', 'C', 'Ls', 'Rs'] },
  { id: '5.0-film', label: '5.0, film order: L C R Ls Rs', speakers: ['L', 'C', 'R', 'Ls', 'Rs'] },
  { id: '5.1', label: '5.1: L R C LFE Ls Rs (ITU, EBU R 123)', speakers: surround },
  { id: '5.1-film', label: '5.1, film order: L C R Ls Rs LFE', speakers: ['L', 'C', 'R', 'Ls', 'Rs', 'LFE'] },
  {
    id: '5.1-pairs',
    label: '5.1, surrounds before centre: L R Ls Rs C LFE',
    speakers: ['L', 'R', 'Ls', 'Rs', 'C', 'LFE'],
  },
  {
    id: '7.1-rears',
    label: '7.1, rears before sides: L R C LFE Lrs Rrs Lss Rss',
    speakers: [...layoutOfCount(8).speakers],
  },
  {
    id: '7.1-sides',
    label: '7.1, sides before rears: L R C LFE Lss Rss Lrs Rrs',
    speakers: ['L', 'R', 'C', 'LFE', 'Lss', 'Rss', 'Lrs', 'Rrs'],
  },
  {
    id: '7.1-film',
    label: '7.1, film order: L C R Lss Rss Lrs Rrs LFE',
    speakers: ['L', 'C', 'R', 'Lss', 'Rss', 'Lrs', 'Rrs', 'LFE'],
  },
  {
    id: '5.1.4',
    label: '5.1.4: L R C LFE Ls Rs, then the heights',
    speakers: [...layoutOfCount(10).speakers],
  },
  { id: '7.1.4', label: '7.1.4: as 7.1, then the heights', speakers: [...layoutOfCount(12).speakers] },
];

type Group = readonly [name: string, speakers: readonly Speaker[]];

/**
 * Track allocations of EBU R 123 (2009): audio channels in order, group after group. Left out: those with pairs of coded sound, and
 * 16d and 16e, whose order our source does not give. Of 12a it says 'four more' after the mixes: taken as two pairs.
 */
const allocations: readonly { id: string; groups: readonly Group[] }[] = [
  {
    id: '4b',
    groups: [
      ['Stereo mix', stereo],
      ['Stereo international sound', stereo],
    ],
  },
  {
    id: '4c',
    groups: [
      ['Stereo mix', stereo],
      ['Stereo audio description', stereo],
    ],
  },
  {
    id: '8a',
    groups: [
      ['Stereo mix', stereo],
      ['5.1 mix', surround],
    ],
  },
  {
    id: '8b',
    groups: [
      ['5.1 mix', surround],
      ['Stereo mix', stereo],
    ],
  },
  {
    id: '8c',
    groups: [
      ['5.1 mix', surround],
      ['Mono 1', ['M']],
      ['Mono 2', ['M']],
    ],
  },
  {
    id: '12a',
    groups: [
      ['Stereo mix', stereo],
      ['5.1 mix', surround],
      ['Stereo 2', stereo],
      ['Stereo 3', stereo],
    ],
  },
  {
    id: '16a',
    groups: [
      ['Stereo mix', stereo],
      ['5.1 mix', surround],
      ['Stereo effects', stereo],
      ['5.1 effects', surround],
    ],
  },
  {
    id: '16b',
    groups: [
      ['5.1 mix', surround],
      ['Stereo mix', stereo],
      ['5.1 effects', surround],
      ['Stereo effects', stereo],
    ],
  },
];

/** Groups in a row as presentations, each of the audio channels that come next. */
function inARow(groups: readonly Group[]): Presentation[] {
  let next = 0;
  return groups.map(([name, speakers]) => ({
    name,
    audioChannels: speakers.map(() => next++),
    speakers: [...speakers],
  }));
}

/** Every order in which so many audio channels may be one programme. */
export const orderChoices = (audioChannels: number): Choice[] =>
  orders
    .filter(({ speakers }) => speakers.length === audioChannels)
    .map(({ id, label, speakers }) => ({
      id: `order-${id}`,
      label,
      presentations: inARow([[id === 'mono' ? 'mono' : label.split(/[:,]/)[0], speakers]]),
    }));

/** Every way to split so many audio channels: the allocations of EBU R 123, then all pairs, then all alone. */
export function splitChoices(audioChannels: number): Choice[] {
  const known = allocations
    .map(({ id, groups }) => ({ id, groups, presentations: inARow(groups) }))
    .filter(({ presentations }) => presentations.flatMap((p) => p.audioChannels).length === audioChannels)
    .map(({ id, groups, presentations }) => ({
      id: `r123-${id}`,
      label: `EBU R 123, ${id}: ${groups.map(([name]) => name.toLowerCase()).join(', ')}`,
      presentations,
    }));
  const even = audioChannels > 2 && audioChannels % 2 === 0;
  const pairs = Array.from({ length: audioChannels / 2 }, (_, i): Group => [`Pair ${i + 1}`, stereo]);
  const alone = Array.from({ length: audioChannels }, (_, i): Group => [`Audio channel ${i + 1}`, ['M']]);
  return [
    ...known,
    ...(even && pairs.length <= 16
      ? [{ id: 'pairs', label: 'Stereo pairs', presentations: inARow(pairs) }]
      : []),
    ...(audioChannels > 1 && audioChannels <= 16
      ? [{ id: 'alone', label: 'Each audio channel alone', presentations: inARow(alone) }]
      : []),
  ];
}

/** Loudspeakers that names of tracks tell ('Mix.Ls', 'LFE', 'left'); `null` unless each tells another one. */
export function speakersOfNames(names: readonly string[]): Speaker[] | null {
  const found = names.map(speakerOfName);
  const told = found.filter((speaker) => speaker !== null);
  return told.length === names.length && new Set(told).size === told.length ? told : null;
}

const endings: readonly [RegExp, Speaker][] = [
  [/^(l|left|lt)$/i, 'L'],
  [/^(r|right|rt)$/i, 'R'],
  [/^(c|centre|center)$/i, 'C'],
  [/^(lfe|sub)$/i, 'LFE'],
  [/^cs$/i, 'Cs'],
  [/^lc$/i, 'Lc'],
  [/^rc$/i, 'Rc'],
  [/^ls$/i, 'Ls'],
  [/^rs$/i, 'Rs'],
  [/^(lss|lsd)$/i, 'Lss'],
  [/^(rss|rsd)$/i, 'Rss'],
  [/^(lrs|lsr|lb)$/i, 'Lrs'],
  [/^(rrs|rsr|rb)$/i, 'Rrs'],
  [/^(ltf|lft)$/i, 'Ltf'],
  [/^(rtf|rft)$/i, 'Rtf'],
  [/^(ltr|lrt)$/i, 'Ltr'],
  [/^(rtr|rrt)$/i, 'Rtr'],
];

/** The loudspeaker that the last word of a name tells; words end at '.', '_', '-' and spaces. */
export function speakerOfName(name: string): Speaker | null {
  const last =
    name
      .trim()
      .split(/[\s._-]+/)
      .at(-1) ?? '';
  return endings.find(([ending]) => ending.test(last))?.[1] ?? null;
}
