/** The demo's invented people, channels and specs. Every name is made up; addresses end in .example. */
import type { SpecBody } from '../../src/domain/spec.ts';
import type { ChannelKind, ContentKind, Role } from '../../src/domain/vocabulary.ts';

interface DemoOrganisation {
  slug: string;
  name: string;
  isSupplier?: boolean;
  isDistributor?: boolean;
  people: { email: string; name: string; roles: Role[] }[];
}

export const organisations: DemoOrganisation[] = [
  {
    slug: 'harrow-sound-television',
    name: 'Harrow Sound Television',
    isDistributor: true,
    people: [
      { email: 'qc@harrowsound.example', name: 'Odile Strand', roles: ['qc_operator'] },
      { email: 'night@harrowsound.example', name: 'Sunniva Pike', roles: ['qc_operator'] },
      { email: 'specs@harrowsound.example', name: 'Bram Tolley', roles: ['spec_owner'] },
      { email: 'admin@harrowsound.example', name: 'Wren Achterberg', roles: ['administrator'] },
    ],
  },
  {
    slug: 'larkfield-audio',
    name: 'Larkfield Audio',
    isDistributor: true,
    people: [
      { email: 'qc@larkfield.example', name: 'Nell Quarry', roles: ['qc_operator'] },
      { email: 'specs@larkfield.example', name: 'Corin Haleby', roles: ['spec_owner', 'administrator'] },
    ],
  },
  {
    slug: 'copper-kettle-post',
    name: 'Copper Kettle Post',
    isSupplier: true,
    people: [
      { email: 'mix@copperkettle.example', name: 'Maren Oduya', roles: ['mix_engineer'] },
      { email: 'admin@copperkettle.example', name: 'Joss Pellam', roles: ['administrator'] },
    ],
  },
  {
    slug: 'two-rooks-studio',
    name: 'Two Rooks Studio',
    isSupplier: true,
    people: [
      { email: 'mix@tworooks.example', name: 'Idris Fennimore', roles: ['mix_engineer', 'administrator'] },
    ],
  },
  {
    slug: 'fennel-lane-mixes',
    name: 'Fennel Lane Mixes',
    isSupplier: true,
    people: [
      { email: 'mix@fennellane.example', name: 'Tamsin Vayle', roles: ['mix_engineer', 'administrator'] },
    ],
  },
];

const r128 = {
  document: 'EBU R 128',
  edition: 'V5, November 2023',
  note: "Tolerance is the channel's own. Check against the receiving party's own document.",
};
const file = (layouts: string[]): SpecBody['rules'] => [
  {
    id: 'sample-rate',
    kind: 'oneOf',
    fact: 'sampleRateHz',
    allowed: ['48000'],
    breach: 'reject',
    measurementTolerance: 0,
  },
  {
    id: 'bit-depth',
    kind: 'oneOf',
    fact: 'bitDepth',
    allowed: ['24'],
    breach: 'reject',
    measurementTolerance: 0,
  },
  {
    id: 'layout',
    kind: 'oneOf',
    fact: 'layout',
    allowed: layouts,
    breach: 'reject',
    measurementTolerance: 0,
  },
];
const integrated = (targetLufs: number, above: number, below: number): SpecBody['rules'][number] => ({
  id: 'integrated',
  kind: 'integrated',
  targetLufs,
  toleranceAboveLu: above,
  toleranceBelowLu: below,
  breach: 'reject',
  measurementTolerance: 0,
});
const atMost = (
  id: string,
  metric: 'truePeakDbtp' | 'rangeLu' | 'shortTermMaxLufs' | 'durationSeconds',
  limit: number,
  breach: 'reject' | 'advise',
): SpecBody['rules'][number] => ({
  id,
  kind: 'limits',
  metric,
  atLeast: null,
  atMost: limit,
  breach,
  measurementTolerance: 0,
  judgeShortProgrammes: false,
});

export const specs: { organisation: string; key: string; name: string; body: SpecBody }[] = [
  {
    organisation: 'harrow-sound-television',
    key: 'harrow-long',
    name: 'Harrow long form',
    body: {
      unit: 'LUFS',
      rounding: 'shown',
      mono: 'asOne',
      source: r128,
      rules: [
        integrated(-23, 0.5, 0.5),
        atMost('true-peak', 'truePeakDbtp', -1, 'reject'),
        atMost('range', 'rangeLu', 18, 'advise'),
        ...file(['stereo', '5.1']),
      ],
    },
  },
  {
    organisation: 'harrow-sound-television',
    key: 'harrow-short',
    name: 'Harrow short form',
    body: {
      unit: 'LUFS',
      rounding: 'shown',
      mono: 'asOne',
      source: { ...r128, document: 'EBU R 128 s1', edition: 'V3, August 2020' },
      rules: [
        integrated(-23, 0.5, 0.5),
        atMost('short-term', 'shortTermMaxLufs', -18, 'reject'),
        atMost('true-peak', 'truePeakDbtp', -1, 'reject'),
        atMost('duration', 'durationSeconds', 120, 'advise'),
        ...file(['stereo']),
      ],
    },
  },
  {
    organisation: 'harrow-sound-television',
    key: 'harrow-kids',
    name: 'Harrow Kids long form',
    body: {
      unit: 'LUFS',
      rounding: 'shown',
      mono: 'asOne',
      source: r128,
      rules: [
        integrated(-23, 0.5, 0.5),
        atMost('true-peak', 'truePeakDbtp', -2, 'reject'),
        atMost('range', 'rangeLu', 12, 'advise'),
        atMost('short-term', 'shortTermMaxLufs', -18, 'advise'),
        ...file(['stereo', '5.1']),
      ],
    },
  },
  {
    organisation: 'larkfield-audio',
    key: 'larkfield-podcast',
    name: 'Larkfield podcast',
    body: {
      unit: 'LUFS',
      rounding: 'shown',
      mono: 'asDual',
      source: {
        document: 'AES TD1008',
        edition: 'v3.13, September 2021',
        note: "Speech not measured apart. Check against the receiving party's own document.",
      },
      rules: [
        integrated(-18, 1, 1),
        atMost('true-peak', 'truePeakDbtp', -1, 'reject'),
        {
          id: 'sample-rate',
          kind: 'oneOf',
          fact: 'sampleRateHz',
          allowed: ['44100', '48000'],
          breach: 'reject',
          measurementTolerance: 0,
        },
        {
          id: 'layout',
          kind: 'oneOf',
          fact: 'layout',
          allowed: ['mono', 'stereo'],
          breach: 'reject',
          measurementTolerance: 0,
        },
      ],
    },
  },
];

export const channels: {
  organisation: string;
  key: string;
  name: string;
  kind: ChannelKind;
  timeZone: string;
  specs: [ContentKind, string][];
  suppliers: string[];
}[] = [
  {
    organisation: 'harrow-sound-television',
    key: 'harrow-one',
    name: 'Harrow One',
    kind: 'television',
    timeZone: 'Europe/London',
    specs: [
      ['long_form', 'harrow-long'],
      ['short_form', 'harrow-short'],
      ['trailer', 'harrow-short'],
    ],
    suppliers: ['copper-kettle-post', 'two-rooks-studio', 'fennel-lane-mixes'],
  },
  {
    organisation: 'harrow-sound-television',
    key: 'harrow-two',
    name: 'Harrow Two',
    kind: 'television',
    timeZone: 'Europe/London',
    specs: [
      ['long_form', 'harrow-long'],
      ['short_form', 'harrow-short'],
    ],
    suppliers: ['copper-kettle-post', 'fennel-lane-mixes'],
  },
  {
    organisation: 'harrow-sound-television',
    key: 'harrow-kids',
    name: 'Harrow Kids',
    kind: 'television',
    timeZone: 'Europe/London',
    specs: [
      ['long_form', 'harrow-kids'],
      ['short_form', 'harrow-short'],
    ],
    suppliers: ['copper-kettle-post', 'two-rooks-studio'],
  },
  {
    organisation: 'larkfield-audio',
    key: 'salt-and-signal',
    name: 'Salt & Signal',
    kind: 'podcast',
    timeZone: 'Europe/London',
    specs: [['podcast_episode', 'larkfield-podcast']],
    suppliers: ['fennel-lane-mixes'],
  },
  {
    organisation: 'larkfield-audio',
    key: 'third-lantern',
    name: 'Third Lantern',
    kind: 'podcast',
    timeZone: 'Europe/London',
    specs: [['podcast_episode', 'larkfield-podcast']],
    suppliers: ['two-rooks-studio'],
  },
];
