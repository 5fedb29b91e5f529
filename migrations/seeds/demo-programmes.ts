/** The demo's deliverables: a season in two layouts, a children's series, two podcasts, a dozen adverts, with known faults. */
import type { ContentKind } from '../../src/domain/vocabulary.ts';
import type { DemoFault } from './faults.ts';
import type { Character, Layout } from './synthesis.ts';

export interface DemoDeliverable {
  by: string;
  fileName: string;
  programme: string;
  episode: string;
  version: string;
  kind: ContentKind;
  channels: string[];
  character: Character;
  layout: Layout;
  seconds: number;
  targetLufs: number;
  sampleRateHz?: number;
  bitDepth?: '16' | '24';
  quietPassageDb?: number;
  loudPassageDb?: number;
  /** A short over of this true peak, at this share of the programme. */
  over?: { audioChannel: number; truePeakDbtp: number; at: number };
  /** Cuts the written file short by this share: the header promises more. */
  truncateShare?: number;
  /** What else is wrong with it. */
  fault?: DemoFault;
  /** What happens to it after measuring: nothing, or put to its first channel and perhaps decided. */
  then: 'keep' | 'submit' | 'approve' | { reject: string } | { waive: string };
  /** Put on air this many hours after the seed; `null`: no date. */
  airsInHours?: number;
  /** Hands in a new version of the deliverable of this file name. */
  replaces?: string;
}

const tallow = (n: number, layout: '5.1' | 'stereo', rest: Partial<DemoDeliverable>): DemoDeliverable => ({
  by: 'mix@copperkettle.example',
  fileName: `tallow_10${n}_mix${layout === '5.1' ? '51' : 'st'}_v1.wav`,
  programme: 'The Tallow Road',
  episode: `1.0${n}`,
  version: `Full mix ${layout}`,
  kind: 'long_form',
  channels: ['harrow-one', 'harrow-two'],
  character: 'drama',
  layout,
  seconds: layout === '5.1' ? 22 : 30,
  targetLufs: -23,
  then: 'submit',
  airsInHours: 24 * n,
  ...rest,
});

const spot = (n: number, by: string, rest: Partial<DemoDeliverable>): DemoDeliverable => ({
  by,
  fileName: `tidewater_bakery_spot${String(n).padStart(2, '0')}_v1.wav`,
  programme: 'Tidewater Bakery',
  episode: `Spot ${n}`,
  version: 'v1',
  kind: 'short_form',
  channels: n % 3 === 0 ? ['harrow-one', 'harrow-two'] : ['harrow-one'],
  character: 'advert',
  layout: 'stereo',
  seconds: 20,
  targetLufs: -23,
  then: 'submit',
  airsInHours: 3 + n,
  ...rest,
});

const kettle = 'mix@copperkettle.example';
const fennel = 'mix@fennellane.example';
const rooks = 'mix@tworooks.example';

export const deliverables: DemoDeliverable[] = [
  tallow(4, 'stereo', { targetLufs: -20.1, then: 'keep' }),
  tallow(4, '5.1', { over: { audioChannel: 4, truePeakDbtp: 0.3, at: 0.7 }, then: 'keep' }),
  tallow(1, 'stereo', { targetLufs: -23.1, then: 'approve' }),
  tallow(1, '5.1', { targetLufs: -22.8, then: 'approve' }),
  tallow(2, 'stereo', { targetLufs: -23.3 }),
  tallow(2, '5.1', {
    over: { audioChannel: 2, truePeakDbtp: -0.4, at: 0.4 },
    then: { waive: 'One over of a few milliseconds, inaudible; cleared with the producer.' },
  }),
  tallow(3, 'stereo', { seconds: 75, quietPassageDb: 16, targetLufs: -23 }),
  tallow(3, '5.1', { targetLufs: -23.2 }),
  tallow(5, 'stereo', { targetLufs: -22.9 }),
  tallow(5, '5.1', { targetLufs: -24.1 }),
  tallow(6, 'stereo', { targetLufs: -23 }),
  tallow(6, '5.1', { targetLufs: -22.6 }),
  tallow(7, 'stereo', { targetLufs: -23, bitDepth: '16' }),
  tallow(7, '5.1', { targetLufs: -23.1 }),
  tallow(8, 'stereo', { targetLufs: -23.4, then: 'keep' }),
  tallow(8, '5.1', { targetLufs: -23, then: 'keep' }),
  ...(
    [
      ['2.10', { targetLufs: -23.3, then: 'approve' }],
      ['2.11', { seconds: 64, quietPassageDb: 16, targetLufs: -22.8 }],
      [
        '2.12',
        {
          targetLufs: -19.4,
          then: {
            reject:
              'Loud by more than 3 LU from the first scene on. Bring the whole mix down; the peaks are fine.',
          },
        },
      ],
    ] as [string, Partial<DemoDeliverable>][]
  ).map(([episode, rest]): DemoDeliverable => ({
    by: rooks,
    fileName: `small_gales_${episode.replace('.', '')}_st_v1.wav`,
    programme: 'Small Gales',
    episode,
    version: 'Full mix stereo',
    kind: 'long_form',
    channels: ['harrow-kids'],
    character: 'children',
    layout: 'stereo',
    seconds: 30,
    targetLufs: -23,
    then: 'submit',
    airsInHours: 40,
    ...rest,
  })),
  {
    by: rooks,
    fileName: 'small_gales_212_st_v2.wav',
    programme: 'Small Gales',
    episode: '2.12',
    version: 'Full mix stereo, v2',
    kind: 'long_form',
    channels: ['harrow-kids'],
    character: 'children',
    layout: 'stereo',
    seconds: 30,
    targetLufs: -20.1,
    then: 'submit',
    airsInHours: 40,
    replaces: 'small_gales_212_st_v1.wav',
  },
  ...(
    [
      ['Salt & Signal', '11', 'salt-and-signal', fennel, { targetLufs: -18.2, then: 'approve' }],
      ['Salt & Signal', '12', 'salt-and-signal', fennel, { layout: 'mono', targetLufs: -18 }],
      ['Third Lantern', '4', 'third-lantern', rooks, { targetLufs: -17.6 }],
      ['Third Lantern', '5', 'third-lantern', rooks, { targetLufs: -18, truncateShare: 0.25 }],
    ] as [string, string, string, string, Partial<DemoDeliverable>][]
  ).map(([programme, episode, channel, by, rest]): DemoDeliverable => ({
    by,
    fileName: `${channel.replaceAll('-', '_')}_ep${episode.padStart(2, '0')}.wav`,
    programme,
    episode,
    version: 'Master',
    kind: 'podcast_episode',
    channels: [channel],
    character: 'talk',
    layout: 'stereo',
    seconds: 40,
    targetLufs: -18,
    sampleRateHz: 44100,
    then: 'submit',
    ...rest,
  })),
  spot(1, kettle, { then: 'approve' }),
  spot(2, kettle, {}),
  spot(3, kettle, { loudPassageDb: 9 }),
  spot(4, kettle, { targetLufs: -23.2 }),
  spot(5, kettle, { sampleRateHz: 44100 }),
  spot(6, kettle, { targetLufs: -22.7 }),
  spot(7, fennel, {}),
  spot(8, fennel, {
    targetLufs: -21.9,
    then: { reject: 'Over target by more than a decibel: Harrow holds adverts to half.' },
  }),
  spot(9, fennel, { over: { audioChannel: 0, truePeakDbtp: 0.8, at: 0.3 } }),
  spot(10, fennel, { targetLufs: -23.1 }),
  spot(11, fennel, { targetLufs: -23 }),
  spot(12, fennel, { targetLufs: -23.3, then: 'keep' }),
  ...(
    [
      ['2.13', 'line-up-tone', { seconds: 32 }],
      ['2.14', 'drop-outs', { then: 'submit' }],
      ['2.15', 'long-silence', {}],
      ['2.16', 'dual-mono', {}],
      ['2.17', 'out-of-phase', { then: 'submit' }],
      ['2.18', 'unused-bits', {}],
      ['2.19', 'declares-wrong', { targetLufs: -21.6 }],
    ] as [string, DemoFault, Partial<DemoDeliverable>][]
  ).map(([episode, fault, rest]): DemoDeliverable => ({
    by: rooks,
    fileName: `small_gales_${episode.replace('.', '')}_st_v1.wav`,
    programme: 'Small Gales',
    episode,
    version: 'Full mix stereo',
    kind: 'long_form',
    channels: ['harrow-kids'],
    character: 'children',
    layout: 'stereo',
    seconds: 20,
    targetLufs: -23,
    then: 'keep',
    fault,
    ...rest,
  })),
  ...(
    [
      ['13', 'clipped', { targetLufs: -12 }],
      ['14', 'dc-offset', {}],
      ['15', 'silent-right', {}],
      ['16', 'band-limited', {}],
    ] as [string, DemoFault, Partial<DemoDeliverable>][]
  ).map(([episode, fault, rest]): DemoDeliverable => ({
    by: fennel,
    fileName: `salt_and_signal_ep${episode}.wav`,
    programme: 'Salt & Signal',
    episode,
    version: 'Master',
    kind: 'podcast_episode',
    channels: ['salt-and-signal'],
    character: 'talk',
    layout: 'stereo',
    seconds: 20,
    targetLufs: -18,
    sampleRateHz: 44100,
    then: 'keep',
    fault,
    ...rest,
  })),
  tallow(4, '5.1', {
    fileName: 'tallow_104_mix51_v2.wav',
    version: 'Full mix 5.1, v2',
    fault: 'lfe-swapped',
    seconds: 20,
    then: 'keep',
  }),
];
