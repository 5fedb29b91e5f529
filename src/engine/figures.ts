/**
 * What a measurement says. Levels are in the units their names carry; a value that does not exist is `null`
 * (too short for the window, below the gate), never -Infinity, NaN or 0.
 */

import type { FrameRateName } from './timecode.ts';

/** Facts of the file as read from its header or told by the decoder. */
export interface AudioFormat {
  /** 'WAV', 'RF64', 'BW64', 'AIFF', 'AIFF-C', or the decoder's container name in capitals ('FLAC', 'MP3', 'MOV', 'MXF', 'OGG', 'MP4'). */
  container: string;
  /** 'PCM', 'PCM float', 'FLAC', 'MP3', 'AAC', 'ALAC', 'Vorbis', 'Opus', … */
  codec: string;
  sampleRateHz: number;
  /** Declared bits per sample; `null` where the codec has none (lossy codecs). */
  bitDepth: number | null;
  /** Audio channels of the file. */
  channels: number;
  /** 'mono', 'stereo', '3.0', '5.0', '5.1', '7.1', '5.1.4', '7.1.4', or 'N channels' where the file does not say; of one presentation, its own. */
  layout: string;
  durationSeconds: number;
  /** Of a coded stream; `null` for samples stored as they are. */
  bitRateKbps?: number | null;
  /** Every audio stream, where the file has several; neighbouring mono tracks that are alike count as one. */
  streams?: AudioStream[];
  /** Of the first sample, since midnight (bext). */
  startTimeReferenceSamples?: number;
  /** As timecode, where the file tells its frame rate too. */
  startTimecode?: string;
  frameRate?: FrameRateName;
  /** By audio channel; empty where one has none (iXML). */
  trackNames?: string[];
  /** What the file says of its own loudness (bext, version 2). */
  declaredLoudness?: DeclaredLoudness;
}

export interface DeclaredLoudness {
  integratedLufs: number | null;
  rangeLu: number | null;
  truePeakDbtp: number | null;
  momentaryMaxLufs: number | null;
  shortTermMaxLufs: number | null;
}

/** One audio stream of a container that holds several; `MeasuringPlan.stream` counts these. */
export interface AudioStream {
  codec: string;
  channels: number;
  layout: string;
  language: string | null;
  title: string | null;
}

/** Something about the file that a person should know; codes are stable and may be rules of a spec. */
export interface Finding {
  code: FindingCode;
  message: string;
  atSeconds?: number;
  lengthSeconds?: number;
  /** Audio channel, from 0, where the finding belongs to one. */
  audioChannel?: number;
}

/** Of the file's integrity: rules of every spec, whether it says so or not. */
export const integrityCodes = [
  'truncated', // less audio than the header promises
  'size-lies', // a header size is 0, 0xFFFFFFFF without ds64, or larger/smaller than the file
  'not-a-number', // NaN or infinite float samples, measured as silence
  'unreadable-part', // the decoder skipped or concealed damaged data
  'layout-assumed', // the file does not say its layout; the usual order was assumed
  'measured-differently', // the bench that sent the file had other figures than the service
] as const;

/** Of the signal, by the defaults of facts/thresholds.ts: told, and a rule where a spec makes it one. */
export const signalCodes = [
  'silence',
  'drop-out',
  'clipping',
  'flat-top',
  'dc-offset',
  'balance',
  'correlation',
  'dual-mono',
  'silent-audio-channel',
  'suspect-order',
  'bandwidth',
  'line-up-tone',
  'unused-bits',
  'declared-differs',
] as const;

export const findingCodes = [...integrityCodes, ...signalCodes] as const;
export type FindingCode = (typeof findingCodes)[number];

export interface Loudness {
  integratedLufs: number | null;
  relativeThresholdLufs: number | null;
  rangeLu: number | null;
  rangeLowLufs: number | null;
  rangeHighLufs: number | null;
  momentaryMaxLufs: number | null;
  shortTermMaxLufs: number | null;
  /** Present for mono only: one channel judged as two (weight 2.0), gated anew. */
  dualMonoIntegratedLufs?: number | null;
}

export interface Figures {
  loudness: Loudness;
  truePeak: {
    maxDbtp: number | null;
    perChannelDbtp: (number | null)[];
    /** Where each audio channel's stands. */
    perChannelAtSeconds?: (number | null)[];
  };
  samplePeak: { maxDbfs: number | null; perChannelDbfs: (number | null)[] };
  /** Where the maxima stand, seconds from the start: the window's centre is not used, its end is. */
  times: {
    momentaryMaxAtSeconds: number | null;
    shortTermMaxAtSeconds: number | null;
    truePeakMaxAtSeconds: number | null;
  };
  /** Seconds of programme that were measured. */
  measuredSeconds: number;
  /** Where they begin in the file; times are counted from there. */
  windowStartSeconds?: number;
  /** 5.1 heard in stereo (ITU-R BS.775-4, Annex 4, Table 2); only where the presentation has surrounds. */
  downmix?: { integratedLufs: number | null; truePeakDbtp: number | null };
  /** Missing in measurements of engines before 2.0.0. */
  signal?: SignalFacts;
}

/** Seconds from the start of what was measured. */
export interface Stretch {
  atSeconds: number;
  lengthSeconds: number;
}
export interface ChannelStretch extends Stretch {
  audioChannel: number;
}
/** How many there are, and the first of them. */
export interface Places {
  count: number;
  listed: ChannelStretch[];
}
export interface Clipping extends Places {
  longestSamples: number;
  /** How many are as long as that, or longer: the runs' lengths, summed from the longest down. */
  atLeast?: { samples: number; count: number }[];
}

/** Silence by one level: every audio channel's RMS of 10 ms under it. */
export interface SilenceAt {
  levelDbfs: number;
  headSeconds: number;
  tailSeconds: number;
  /** Neither at the head nor at the tail. */
  longestInsideSeconds: number;
  longestInsideAtSeconds: number | null;
}

export interface StereoFacts {
  /** K-weighted loudness of left over right; `null` where one is silent. */
  balanceLu: number | null;
  /** Over windows of 3 s; `null` where none holds signal on both sides. */
  correlationLowest: number | null;
  correlationLowestAtSeconds: number | null;
  belowZeroPercent: number | null;
  dualMono: boolean | null;
}

export interface LineUpTone {
  hz: number;
  /** A sine at full scale is 0 dBFS. */
  levelDbfs: number;
  startSeconds: number;
  endSeconds: number;
}

export type SuspectOrder = 'lfe-full-band' | 'centre-silent';

/** Facts of the signal, by the definitions of facts/. */
export interface SignalFacts {
  silence: SilenceAt[];
  dropOuts: Places;
  clipping: Clipping;
  flatTops: Clipping;
  /** By audio channel, of full scale, with its sign. */
  dcOffsetPercent: number[];
  /** Only where the presentation has a left and a right. */
  stereo?: StereoFacts;
  silentAudioChannels: number[];
  suspectOrder: SuspectOrder | null;
  bandwidthHz: number | null;
  lineUpTone: LineUpTone | null;
  /** Of integer samples: bits from the top down to the lowest in use. */
  effectiveBitDepth: number | null;
}

/** One measurement of one presentation. */
export interface Measurement {
  format: AudioFormat;
  figures: Figures;
  findings: Finding[];
}

/**
 * The series kept beside the figures. Per 10 ms the weighted energy (mean square, linear, all audio channels summed
 * with their weights) and the largest true peak (linear, over all audio channels); per 100 ms the K-weighted mean
 * square of each audio channel, interleaved by audio channel.
 */
export interface MeasurementSeries {
  stepSeconds: 0.01;
  energy: Float32Array | Float64Array;
  truePeak: Float32Array;
  channelCount: number;
  channelEnergy: Float32Array;
}

/** Name of the engine that made a measurement; changes whenever any figure could. */
export const engineVersion = '2.0.0';
