/**
 * Starting specs from published documents, copied into an organisation and then its own. Forms that are measured on
 * dialogue wait until dialogue can be measured. How sure each figure is stands in its note.
 */
import { specBodySchema, type Rule, type SpecBody, type StartingSpec } from './spec.ts';

const check = 'Check against the receiving party\u2019s own document.';

type RuleInput = Omit<Extract<Rule, { kind: 'integrated' }>, 'id' | 'kind' | 'breach'>;

const integrated = (rule: RuleInput): Rule => ({
  id: 'integrated',
  kind: 'integrated',
  breach: 'reject',
  ...rule,
});

const atMost = (
  id: string,
  metric: 'truePeakDbtp' | 'shortTermMaxLufs',
  limit: number,
  measurementTolerance = 0,
): Rule => ({
  id,
  kind: 'limits',
  metric,
  atLeast: null,
  atMost: limit,
  breach: 'reject',
  measurementTolerance,
  judgeShortProgrammes: false,
});

const truePeak = (limit: number, tolerance = 0): Rule =>
  atMost('true-peak', 'truePeakDbtp', limit, tolerance);

const body = (given: {
  unit?: SpecBody['unit'];
  document: string;
  edition: string;
  note: string;
  rules: Rule[];
}): SpecBody =>
  specBodySchema.parse({
    unit: given.unit ?? 'LUFS',
    source: { document: given.document, edition: given.edition, note: `${given.note} ${check}` },
    rules: given.rules,
  });

/** Figures that no document read in full stands behind. */
const secondary = 'The figures were read in secondary sources, not in the document itself.';

export const startingSpecs: readonly StartingSpec[] = [
  {
    id: 'ebu-r128-produced',
    name: 'EBU R 128, produced programme',
    contentKinds: ['long_form', 'music_programme'],
    body: body({
      document: 'EBU R 128',
      edition: 'V5, November 2023',
      note: 'Target by clause h, with the allowance for measurement of \u00b10.2 LU (i); true peak by clause m with its \u00b10.3 dB. No limit of the loudness range is set (n).',
      rules: [
        integrated({
          targetLufs: -23,
          toleranceAboveLu: 0,
          toleranceBelowLu: 0,
          measurementTolerance: 0.2,
        }),
        truePeak(-1, 0.3),
      ],
    }),
  },
  {
    id: 'ebu-r128-not-practical',
    name: 'EBU R 128, where the target cannot practically be met',
    contentKinds: ['long_form', 'music_programme'],
    body: body({
      document: 'EBU R 128',
      edition: 'V5, November 2023',
      note: 'Clause h: \u00b11.0 LU where the target cannot practically be reached, live programmes for instance; the edge should not become routine. Allowances for measurement by i and m.',
      rules: [
        integrated({
          targetLufs: -23,
          toleranceAboveLu: 1,
          toleranceBelowLu: 1,
          measurementTolerance: 0.2,
        }),
        truePeak(-1, 0.3),
      ],
    }),
  },
  {
    id: 'ebu-r128-s1',
    name: 'EBU R 128 s1, short form',
    contentKinds: ['short_form', 'trailer'],
    body: body({
      document: 'EBU R 128 s1',
      edition: 'V3, August 2020',
      note: 'For items of up to about two minutes, measured whole. Short-term at most 5 LU above the target; the loudness range is not used.',
      rules: [
        integrated({
          targetLufs: -23,
          toleranceAboveLu: 0,
          toleranceBelowLu: 0,
          measurementTolerance: 0.2,
        }),
        atMost('short-term', 'shortTermMaxLufs', -18, 0.2),
        truePeak(-1, 0.3),
      ],
    }),
  },
  {
    id: 'ebu-r128-s2',
    name: 'EBU R 128 s2, streaming at an interim level',
    contentKinds: ['podcast_episode', 'music_programme', 'long_form'],
    body: body({
      document: 'EBU R 128 s2',
      edition: 'V3, November 2023',
      note: 'The interim distribution level of \u221220.0 to \u221216.0 LUFS; where the listening situation allows, a stream stays at \u221223.0. The true peak is that of R 128 m: coded distribution may need less.',
      rules: [
        integrated({ targetLufs: -18, toleranceAboveLu: 2, toleranceBelowLu: 2, measurementTolerance: 0 }),
        truePeak(-1),
      ],
    }),
  },
  {
    id: 'atsc-a85-short-form',
    name: 'ATSC A/85, short form',
    contentKinds: ['short_form', 'trailer'],
    body: body({
      unit: 'LKFS',
      document: 'ATSC A/85',
      edition: 'A/85:2013',
      note: `Whole mix at \u221224 LKFS; the \u00b12 dB are an allowance for measurement, not a window to aim inside. ${secondary} A full revision, A/85:2026-07, is out; long form is measured on its anchor, which this service does not do yet.`,
      rules: [
        integrated({ targetLufs: -24, toleranceAboveLu: 0, toleranceBelowLu: 0, measurementTolerance: 2 }),
        truePeak(-2),
      ],
    }),
  },
  {
    id: 'aes-td1008-assorted',
    name: 'AES TD1008, where speech is not measured apart',
    contentKinds: ['podcast_episode', 'long_form'],
    body: body({
      document: 'AES TD1008',
      edition: 'v3.13, 24 September 2021',
      note: `Assorted content for audio-only distribution, speech not measurable: \u221218 LUFS, at most 2 LU above; no lower limit is given. True peak at the input of a lossy codec. ${secondary}`,
      rules: [
        integrated({ targetLufs: -18, toleranceAboveLu: 2, toleranceBelowLu: null, measurementTolerance: 0 }),
        truePeak(-1),
      ],
    }),
  },
  {
    id: 'aes-td1008-music',
    name: 'AES TD1008, music by track',
    contentKinds: ['music_programme'],
    body: body({
      document: 'AES TD1008',
      edition: 'v3.13, 24 September 2021',
      note: `Music normalised by track: \u221216 LUFS, at most 0.2 LU above; no lower limit is given. By album, the loudest track may stand at \u221214 LUFS. ${secondary}`,
      rules: [
        integrated({
          targetLufs: -16,
          toleranceAboveLu: 0.2,
          toleranceBelowLu: null,
          measurementTolerance: 0,
        }),
        truePeak(-1),
      ],
    }),
  },
  {
    id: 'free-tv-op59',
    name: 'Free TV Australia OP-59',
    contentKinds: ['long_form', 'short_form', 'trailer', 'music_programme'],
    body: body({
      unit: 'LKFS',
      document: 'Free TV Australia OP-59',
      edition: 'as in force since January 2013',
      note: `Whole soundtrack measured. ${secondary}`,
      rules: [
        integrated({ targetLufs: -24, toleranceAboveLu: 1, toleranceBelowLu: 1, measurementTolerance: 0 }),
        truePeak(-2),
      ],
    }),
  },
  {
    id: 'arib-tr-b32',
    name: 'ARIB TR-B32',
    contentKinds: ['long_form', 'short_form', 'trailer', 'music_programme'],
    body: body({
      unit: 'LKFS',
      document: 'ARIB TR-B32',
      edition: 'version 1.6, 25 March 2025',
      note: `Finished programmes and commercials; a lower target is allowed where it is meant. The true peak is that of the table in Report ITU-R BS.2434. ${secondary}`,
      rules: [
        integrated({ targetLufs: -24, toleranceAboveLu: 1, toleranceBelowLu: 1, measurementTolerance: 0 }),
        truePeak(-1),
      ],
    }),
  },
];

export const findStartingSpec = (id: string): StartingSpec | null =>
  startingSpecs.find((spec) => spec.id === id) ?? null;

/** A first body for a spec that starts from nothing: to be edited, and of no document. */
export const plainBody: SpecBody = specBodySchema.parse({
  rules: [
    {
      id: 'integrated',
      kind: 'integrated',
      breach: 'reject',
      targetLufs: -23,
      toleranceAboveLu: 1,
      toleranceBelowLu: 1,
    },
    { id: 'true-peak', kind: 'limits', metric: 'truePeakDbtp', breach: 'reject', atLeast: null, atMost: -1 },
  ],
});
