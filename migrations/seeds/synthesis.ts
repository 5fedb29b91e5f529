/**
 * The demo's sound: programmes made of speech-like modulation, tones and shaped noise. Nothing recorded, nothing random
 * between two runs: every voice is driven by a seed. Planar Float64, full scale 1.0.
 */

export type Character = 'drama' | 'children' | 'talk' | 'advert';
export type Layout = 'mono' | 'stereo' | '5.1';

export interface Score {
  character: Character;
  layout: Layout;
  seconds: number;
  sampleRateHz: number;
  seed: number;
  /** Drops everything but a whisper by this many dB for the middle part of the programme: a wide range. */
  quietPassageDb?: number;
  /** Raises one stretch of 4 s by this many dB: a high short-term maximum. */
  loudPassageDb?: number;
}

/** Mulberry32: 32-bit state, uniform in [0, 1). */
function dice(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = state;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

/** Two-pole resonator at `hz` with bandwidth `widthHz`; returns one sample per call. */
function resonator(sampleRateHz: number) {
  let y1 = 0;
  let y2 = 0;
  let a1 = 0;
  let a2 = 0;
  let gain = 1;
  return {
    tune(hz: number, widthHz: number) {
      const r = Math.exp((-Math.PI * widthHz) / sampleRateHz);
      a1 = 2 * r * Math.cos((2 * Math.PI * hz) / sampleRateHz);
      a2 = -r * r;
      gain = 1 - r;
    },
    step(x: number) {
      const y = gain * x + a1 * y1 + a2 * y2;
      y2 = y1;
      y1 = y;
      return y;
    },
  };
}

/** Vowels as three formants in Hz (common practice, no source). */
const vowels = [
  [730, 1090, 2440],
  [530, 1840, 2480],
  [270, 2290, 3010],
  [570, 840, 2410],
  [300, 870, 2240],
] as const;

/** Speech-like: syllables of a voiced pulse through three formants, with consonants of noise, in phrases with pauses. */
function voice(samples: number, sampleRateHz: number, seed: number, pitchHz: number): Float64Array {
  const roll = dice(seed);
  const out = new Float64Array(samples);
  const formants = [resonator(sampleRateHz), resonator(sampleRateHz), resonator(sampleRateHz)];
  let phase = 0;
  let at = Math.round(0.15 * sampleRateHz);
  while (at < samples) {
    const syllables = 4 + Math.floor(roll() * 7);
    const stress = 0.75 + roll() * 0.5;
    for (let s = 0; s < syllables && at < samples; s++) {
      const vowel = vowels[Math.floor(roll() * vowels.length)];
      formants.forEach((f, i) => f.tune(vowel[i] * (0.95 + roll() * 0.1), 80 + 40 * i));
      const length = Math.round((0.12 + roll() * 0.16) * sampleRateHz);
      const consonant = Math.round((0.02 + roll() * 0.05) * sampleRateHz);
      const pitch = pitchHz * (1.12 - (0.25 * s) / syllables + roll() * 0.08);
      const level = stress * (0.6 + roll() * 0.5);
      for (let i = 0; i < length && at < samples; i++, at++) {
        const voiced = i >= consonant;
        phase += pitch / sampleRateHz;
        if (phase >= 1) phase -= 1;
        const pulse = voiced ? Math.pow(1 - phase, 6) - 0.14 : 0;
        const breath = (roll() - 0.5) * (voiced ? 0.02 : 0.22);
        const rise = Math.min(1, i / (0.02 * sampleRateHz), (length - i) / (0.04 * sampleRateHz));
        const source = (pulse + breath) * rise * level;
        out[at] =
          formants[0].step(source) * 3 + formants[1].step(source) * 1.6 + formants[2].step(source) * 0.9;
      }
    }
    at += Math.round((0.25 + roll() * 0.6) * sampleRateHz);
  }
  return out;
}

/** Slow chords of four partials each, one every `chordSeconds`, with a soft attack. */
function chords(
  samples: number,
  sampleRateHz: number,
  seed: number,
  chordSeconds: number,
  rootHz: number,
): Float64Array {
  const roll = dice(seed);
  const out = new Float64Array(samples);
  const steps = [0, 3, 5, 7, 8, 10];
  const length = Math.round(chordSeconds * sampleRateHz);
  for (let start = 0; start < samples; start += length) {
    const root = rootHz * 2 ** (steps[Math.floor(roll() * steps.length)] / 12);
    const tones = [1, 1.5, 2, 2.5].map((ratio) => ({
      w: (2 * Math.PI * root * ratio) / sampleRateHz,
      p: roll() * 6.28,
    }));
    const end = Math.min(samples, start + length + Math.round(0.4 * sampleRateHz));
    for (let i = start; i < end; i++) {
      const t = (i - start) / sampleRateHz;
      const shape = Math.min(1, t / 0.08) * Math.exp(-t / (chordSeconds * 0.9));
      let sum = 0;
      for (const [k, tone] of tones.entries()) sum += Math.sin(tone.w * i + tone.p) / (1 + k);
      out[i] += sum * shape * 0.25;
    }
  }
  return out;
}

/** Noise with most of its energy low, breathing slowly: room, wind, sea. */
function ambience(samples: number, sampleRateHz: number, seed: number): Float64Array {
  const roll = dice(seed);
  const out = new Float64Array(samples);
  const slow = Math.exp((-2 * Math.PI * 400) / sampleRateHz);
  const fast = Math.exp((-2 * Math.PI * 4000) / sampleRateHz);
  let low = 0;
  let high = 0;
  const period = (5 + roll() * 4) * sampleRateHz;
  for (let i = 0; i < samples; i++) {
    const white = roll() * 2 - 1;
    low = slow * low + (1 - slow) * white;
    high = fast * high + (1 - fast) * white;
    out[i] = (low * 2 + high * 0.15) * (0.75 + 0.25 * Math.sin((2 * Math.PI * i) / period));
  }
  return out;
}

const mixes: Record<
  Character,
  { voice: number; music: number; room: number; chordSeconds: number; rootHz: number; pitchHz: number }
> = {
  drama: { voice: 1, music: 0.35, room: 0.5, chordSeconds: 2.4, rootHz: 110, pitchHz: 118 },
  children: { voice: 1, music: 0.55, room: 0.15, chordSeconds: 0.8, rootHz: 196, pitchHz: 210 },
  talk: { voice: 1, music: 0.08, room: 0.08, chordSeconds: 3, rootHz: 98, pitchHz: 128 },
  advert: { voice: 1, music: 0.6, room: 0.1, chordSeconds: 0.5, rootHz: 220, pitchHz: 165 },
};

/** The programme as planar audio channels: mono; stereo L R; 5.1 in the order L R C LFE Ls Rs. Levels are not yet a master's. */
export function synthesise(score: Score): Float64Array[] {
  const samples = Math.round(score.seconds * score.sampleRateHz);
  const mix = mixes[score.character];
  const rate = score.sampleRateHz;
  const speech = voice(samples, rate, score.seed, mix.pitchHz);
  const left = chords(samples, rate, score.seed + 1, mix.chordSeconds, mix.rootHz);
  const right = chords(samples, rate, score.seed + 1, mix.chordSeconds, mix.rootHz * 1.002);
  const rooms = Array.from({ length: score.layout === '5.1' ? 4 : 2 }, (_, i) =>
    ambience(samples, rate, score.seed + 10 + i),
  );
  const add = (...parts: [Float64Array, number][]) => {
    const out = new Float64Array(samples);
    for (const [part, gain] of parts) for (let i = 0; i < samples; i++) out[i] += part[i] * gain;
    return out;
  };
  const planar =
    score.layout === 'mono'
      ? [add([speech, mix.voice], [left, mix.music], [rooms[0], mix.room])]
      : score.layout === 'stereo'
        ? [
            add([speech, mix.voice * 0.7], [left, mix.music], [rooms[0], mix.room]),
            add([speech, mix.voice * 0.7], [right, mix.music], [rooms[1], mix.room]),
          ]
        : [
            add([left, mix.music], [rooms[0], mix.room]),
            add([right, mix.music], [rooms[1], mix.room]),
            add([speech, mix.voice]),
            add([
              chords(samples, rate, score.seed + 2, mix.chordSeconds * 2, mix.rootHz / 2),
              mix.music * 0.5,
            ]),
            add([rooms[2], mix.room * 0.8], [left, mix.music * 0.2]),
            add([rooms[3], mix.room * 0.8], [right, mix.music * 0.2]),
          ];
  shape(planar, score);
  return planar;
}

/** The passages that make a range wide or a short-term maximum high. */
function shape(planar: Float64Array[], score: Score): void {
  const ramp = (from: number, to: number, db: number) => {
    const gain = 10 ** (db / 20);
    const edge = 0.2 * score.sampleRateHz;
    for (const audioChannel of planar)
      for (
        let i = Math.round(from * score.sampleRateHz);
        i < Math.min(audioChannel.length, to * score.sampleRateHz);
        i++
      ) {
        const inside = Math.min(
          1,
          (i - from * score.sampleRateHz) / edge,
          (to * score.sampleRateHz - i) / edge,
        );
        audioChannel[i] *= 1 + (gain - 1) * inside;
      }
  };
  if (score.quietPassageDb) ramp(score.seconds * 0.35, score.seconds * 0.7, -score.quietPassageDb);
  if (score.loudPassageDb) ramp(score.seconds * 0.5, score.seconds * 0.5 + 4, score.loudPassageDb);
}

/** Scales in place by `db`. */
export function applyGain(planar: Float64Array[], db: number): void {
  const gain = 10 ** (db / 20);
  for (const audioChannel of planar) for (let i = 0; i < audioChannel.length; i++) audioChannel[i] *= gain;
}

/** Rounds every peak above `ceilingDbfs` off by a gain that falls 5 ms ahead of it and recovers in 80 ms, all audio channels alike. */
export function limit(planar: Float64Array[], ceilingDbfs: number, sampleRateHz: number): void {
  const ceiling = 10 ** (ceilingDbfs / 20);
  const samples = planar[0].length;
  const wanted = new Float64Array(samples);
  for (let i = 0; i < samples; i++) {
    let peak = 0;
    for (const audioChannel of planar) peak = Math.max(peak, Math.abs(audioChannel[i]));
    wanted[i] = peak > ceiling ? ceiling / peak : 1;
  }
  const ahead = 1 / (0.005 * sampleRateHz);
  const recover = 1 / (0.08 * sampleRateHz);
  for (let i = samples - 2; i >= 0; i--) wanted[i] = Math.min(wanted[i], wanted[i + 1] + ahead);
  for (let i = 1; i < samples; i++) wanted[i] = Math.min(wanted[i], wanted[i - 1] + recover);
  for (const audioChannel of planar) for (let i = 0; i < samples; i++) audioChannel[i] *= wanted[i];
}

/**
 * Puts a 6 ms burst at a quarter of the sample rate, 45 degrees off the samples, into one audio channel: its true peak
 * stands 3 dB above its samples (EBU Tech 3341, signal 16), here at `truePeakDbtp`.
 */
export function addOver(
  planar: Float64Array[],
  audioChannel: number,
  atSeconds: number,
  truePeakDbtp: number,
  sampleRateHz: number,
): void {
  const start = Math.round(atSeconds * sampleRateHz);
  const length = Math.round(0.006 * sampleRateHz);
  const amplitude = 10 ** (truePeakDbtp / 20);
  for (let i = 0; i < length; i++) {
    const fade = Math.min(1, i / (length / 4), (length - i) / (length / 4));
    planar[audioChannel][start + i] = fade * amplitude * Math.sin((Math.PI / 2) * i + Math.PI / 4);
  }
}
