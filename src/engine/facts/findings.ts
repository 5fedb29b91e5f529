/** The facts as findings: what is beyond a default, in a sentence, with its times. */
import type { DeclaredLoudness, Figures, Finding, SignalFacts, Stretch } from '../figures.ts';
import type { Speaker } from '../layouts.ts';
import {
  balanceLu,
  bandwidth,
  correlation,
  dcOffsetPercent,
  declared,
  defaultSilence,
  lineUpLevels,
  lineUpNearDb,
} from './thresholds.ts';

/** Places of one kind that are told one by one. */
const mostTold = 20;

interface Of {
  figures: Figures;
  facts: SignalFacts;
  silences: readonly Stretch[];
  speakers: readonly Speaker[];
  bitDepth: number | null;
  declaredLoudness: DeclaredLoudness | undefined;
}

const minus = (text: string) => text.replace('-', '\u2212');
const level = (value: number, decimals = 1) => minus(value.toFixed(decimals));
const times = (count: number, what: string) => `${count} ${what}${count === 1 ? '' : 's'}`;

/** Every finding of the signal, in the order of signalCodes. */
export function signalFindings(of: Of): Finding[] {
  const { facts } = of;
  const channel = (c: number) => (of.speakers[c] === 'unknown' ? `audio channel ${c + 1}` : of.speakers[c]);
  const { stereo } = facts;
  return [
    ...of.silences.slice(0, mostTold).map((stretch, i): Finding => ({
      code: 'silence',
      message: `Silence of ${stretch.lengthSeconds.toFixed(2)} s: every audio channel is under ${level(defaultSilence.levelDbfs, 0)} dBFS.${more(of.silences.length, i)}`,
      ...stretch,
    })),
    ...facts.dropOuts.listed.slice(0, mostTold).map((place, i): Finding => ({
      code: 'drop-out',
      message: `Drop-out of ${(place.lengthSeconds * 1000).toFixed(1)} ms in ${channel(place.audioChannel)}: the signal is zero in between.${more(facts.dropOuts.count, i)}`,
      ...place,
    })),
    ...facts.clipping.listed.slice(0, 1).map((place): Finding => ({
      code: 'clipping',
      message: `Clipped: ${times(facts.clipping.count, 'run')} of 3 samples or more at full scale, the longest of ${facts.clipping.longestSamples}; the first is in ${channel(place.audioChannel)}.`,
      ...place,
    })),
    // What is clipped at full scale is flat there too, and told already.
    ...(facts.clipping.count === 0 ? facts.flatTops.listed : []).slice(0, 1).map((place): Finding => ({
      code: 'flat-top',
      message: `Flat tops under full scale: ${times(facts.flatTops.count, 'run')} of 5 equal samples or more at the peak, the longest of ${facts.flatTops.longestSamples}. It may have been clipped and turned down.`,
      ...place,
    })),
    ...facts.dcOffsetPercent.flatMap((percent, audioChannel): Finding[] =>
      Math.abs(percent) > dcOffsetPercent
        ? [
            {
              code: 'dc-offset',
              message: `DC offset of ${level(percent, 2)} % of full scale in ${channel(audioChannel)}.`,
              audioChannel,
            },
          ]
        : [],
    ),
    ...told(stereo?.balanceLu != null && Math.abs(stereo.balanceLu) > balanceLu, () => ({
      code: 'balance',
      message: `Out of balance: ${(stereo?.balanceLu ?? 0) > 0 ? 'left' : 'right'} is ${level(Math.abs(stereo?.balanceLu ?? 0))} LU louder.`,
    })),
    ...told(
      (stereo?.correlationLowest ?? 1) < correlation.lowest ||
        (stereo?.belowZeroPercent ?? 0) > correlation.belowZeroPercent,
      () => ({
        code: 'correlation',
        message: `Left and right work against each other: correlation goes down to ${level(stereo?.correlationLowest ?? 0, 2)}, and is below 0 for ${level(stereo?.belowZeroPercent ?? 0, 0)} % of the time.`,
        atSeconds: stereo?.correlationLowestAtSeconds ?? 0,
        lengthSeconds: correlation.windowSeconds,
      }),
    ),
    ...told(stereo?.dualMono === true, () => ({
      code: 'dual-mono',
      message: 'Left and right are the same: this is mono on two audio channels.',
    })),
    ...facts.silentAudioChannels.map((audioChannel): Finding => ({
      code: 'silent-audio-channel',
      message: `${capital(channel(audioChannel))} is silent while others play.`,
      audioChannel,
    })),
    ...told(facts.suspectOrder !== null, () => ({
      code: 'suspect-order',
      message:
        facts.suspectOrder === 'centre-silent'
          ? 'The audio channels may be in another order: the centre is silent while the LFE plays the whole band.'
          : 'The audio channels may be in another order: more than a tenth of the LFE’s energy lies above 250 Hz.',
    })),
    ...told(facts.bandwidthHz !== null && facts.bandwidthHz < bandwidth.leastHz, () => ({
      code: 'bandwidth',
      message: `The band ends at ${((facts.bandwidthHz ?? 0) / 1000).toFixed(1)} kHz. It may come from a coded file or a low sample rate.`,
    })),
    ...(facts.lineUpTone ? [toneFinding(facts.lineUpTone)] : []),
    ...told(
      facts.effectiveBitDepth !== null && of.bitDepth !== null && facts.effectiveBitDepth < of.bitDepth,
      () => ({
        code: 'unused-bits',
        message: `Only ${facts.effectiveBitDepth} of ${of.bitDepth} bits are in use.`,
      }),
    ),
    ...declaredFinding(of),
  ];
}

const more = (count: number, i: number) =>
  i === mostTold - 1 && count > mostTold ? ` ${count - mostTold} more follow.` : '';
const capital = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);
const told = (is: boolean, make: () => Finding): Finding[] => (is ? [make()] : []);

function toneFinding({
  hz,
  levelDbfs,
  startSeconds,
  endSeconds,
}: NonNullable<SignalFacts['lineUpTone']>): Finding {
  const near = Object.entries(lineUpLevels).find(([, value]) => Math.abs(levelDbfs - value) <= lineUpNearDb);
  return {
    code: 'line-up-tone',
    message: `A line-up tone of ${Math.round(hz)} Hz at ${level(levelDbfs)} dBFS${near ? ` (${near[0]})` : ''} stands until ${endSeconds.toFixed(1)} s. The programme may begin after it.`,
    atSeconds: startSeconds,
    lengthSeconds: endSeconds - startSeconds,
  };
}

function declaredFinding({ declaredLoudness, figures }: Of): Finding[] {
  if (!declaredLoudness) return [];
  const { loudness, truePeak } = figures;
  const pairs: [string, number | null, number | null, number, string][] = [
    ['integrated', declaredLoudness.integratedLufs, loudness.integratedLufs, declared.loudnessLu, 'LUFS'],
    ['range', declaredLoudness.rangeLu, loudness.rangeLu, declared.loudnessLu, 'LU'],
    ['true peak', declaredLoudness.truePeakDbtp, truePeak.maxDbtp, declared.peakDb, 'dBTP'],
    ['momentary', declaredLoudness.momentaryMaxLufs, loudness.momentaryMaxLufs, declared.loudnessLu, 'LUFS'],
    ['short-term', declaredLoudness.shortTermMaxLufs, loudness.shortTermMaxLufs, declared.loudnessLu, 'LUFS'],
  ];
  // Declared values have two decimals: half of the last one is no difference.
  const differing = pairs.filter(
    ([, said, measured, allowed]) =>
      said !== null && (measured === null || Math.abs(said - measured) > allowed + 0.005),
  );
  if (differing.length === 0) return [];
  const words = differing.map(
    ([name, said, measured, , unit]) =>
      `${name} ${level(said ?? 0)} ${unit}, measured ${measured === null ? 'no value' : level(measured)}`,
  );
  return [
    {
      code: 'declared-differs',
      message: `The file declares other loudness than it has: ${words.join('; ')}.`,
    },
  ];
}
