/** What counts as a fault where a spec says nothing else. Common practice, no source, unless one is named. */

/** Levels at which silence is looked for, so that a spec may choose one. */
export const silenceLevelsDbfs = [-40, -50, -60, -70] as const;
export const defaultSilence = { levelDbfs: -60, seconds: 2 } as const;
/** Lengths in samples from which clipped runs are counted, so that a spec may choose one; the first is the default. */
export const clippedLengths = [3, 5, 10, 20, 50] as const;
export const dropOut = { leastSeconds: 0.002, mostSeconds: 1, aroundSeconds: 0.1, aroundDbfs: -50 } as const;
export const dcOffsetPercent = 0.5;
export const balanceLu = 3;
export const correlation = { lowest: -0.3, belowZeroPercent: 5, windowSeconds: 3 } as const;
/** L - R against L + R, in power. */
export const dualMonoDb = -60;
export const silentChannelDbfs = -60;
/** Of the LFE's energy, above this frequency. */
export const suspectLfe = { share: 0.1, aboveHz: 250 } as const;
export const bandwidth = { dropDb: 60, leastHz: 17_000 } as const;
export const lineUpTone = { levelDb: 0.2, purityDb: 40, leastSeconds: 1, withinSeconds: 120 } as const;
/** Alignment levels: EBU R 68-2000 and SMPTE RP 155 (the latter from secondary sources); named where a tone is as near. */
export const lineUpLevels = { 'EBU R 68': -18, 'SMPTE RP 155': -20 } as const;
export const lineUpNearDb = 0.5;
/** Error of measurement that two meters are allowed (EBU R 128 V5, i and m). */
export const declared = { loudnessLu: 0.2, peakDb: 0.3 } as const;

/** Places that are listed one by one; the count tells of all. */
export const mostListed = 200;

export const powerOfDb = (db: number): number => 10 ** (db / 10);
