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

const gales = (episode: string, rest: Partial<DemoDeliverable>): DemoDeliverable => ({
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
});

const podcasts = {
  'salt-and-signal': { by: fennel, programme: 'Salt & Signal' },
  'third-lantern': { by: rooks, programme: 'Third Lantern' },
} as const;
const podcast = (
  channel: keyof typeof podcasts,
  episode: string,
  rest: Partial<DemoDeliverable>,
): DemoDeliverable => ({
  ...podcasts[channel],
  fileName: `${channel.replaceAll('-', '_')}_ep${episode.padStart(2, '0')}.wav`,
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
});

/** A master with a fault beside its loudness: short, and kept by its supplier unless it says otherwise. */
const faulty = (fault: DemoFault): Partial<DemoDeliverable> => ({
  fault,
  seconds: 20,
  then: 'keep',
  airsInHours: undefined,
});

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
  gales('2.10', { targetLufs: -23.3, then: 'approve' }),
  gales('2.11', { seconds: 64, quietPassageDb: 16, targetLufs: -22.8 }),
  gales('2.12', {
    targetLufs: -19.4,
    then: {
      reject: 'Loud by more than 3 LU from the first scene on. Bring the whole mix down; the peaks are fine.',
    },
  }),
  gales('2.12', {
    fileName: 'small_gales_212_st_v2.wav',
    version: 'Full mix stereo, v2',
    targetLufs: -20.1,
    replaces: 'small_gales_212_st_v1.wav',
  }),
  podcast('salt-and-signal', '11', { targetLufs: -18.2, then: 'approve' }),
  podcast('salt-and-signal', '12', { layout: 'mono' }),
  podcast('third-lantern', '4', { targetLufs: -17.6 }),
  podcast('third-lantern', '5', { truncateShare: 0.25 }),
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
  gales('2.13', { ...faulty('line-up-tone'), seconds: 32 }),
  gales('2.14', { ...faulty('drop-outs'), then: 'submit' }),
  gales('2.15', faulty('long-silence')),
  gales('2.16', faulty('dual-mono')),
  gales('2.17', { ...faulty('out-of-phase'), then: 'submit' }),
  gales('2.18', faulty('unused-bits')),
  gales('2.19', { ...faulty('declares-wrong'), targetLufs: -21.6 }),
  podcast('salt-and-signal', '13', { ...faulty('clipped'), targetLufs: -12 }),
  podcast('salt-and-signal', '14', faulty('dc-offset')),
  podcast('salt-and-signal', '15', faulty('silent-right')),
  podcast('salt-and-signal', '16', faulty('band-limited')),
  tallow(4, '5.1', {
    fileName: 'tallow_104_mix51_v2.wav',
    version: 'Full mix 5.1, v2',
    ...faulty('lfe-swapped'),
  }),
];
