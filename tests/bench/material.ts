/**
 * The bench's sound: items of a minute, mixed from stems of unlike lengths by gains that wander, so that no two minutes are
 * alike; cut hard like a running order. Driven by seeds: the same files in every run.
 */
import { limit, synthesise, type Character } from '../../migrations/seeds/synthesis.ts';
import { dice, lowPass, pink } from './noises.ts';

export type Kind = 'broadcast' | 'podcast' | 'pink' | 'white';

export interface Recipe {
  kind: Kind;
  layout: 'stereo' | '5.1';
  sampleRateHz: number;
  seconds: number;
}

export const itemSeconds = 60;

/** What the table's foot says of it. */
export const howItIsMade = [
  'Programmes: the demo’s generator (speech of voiced pulses and formants, chords, room), four programmes of 41 to 61 s mixed with pink noise,',
  'hats and thuds up to 20 kHz; each minute has other offsets, gains that wander, and a level of its own. Broadcast is limited at −3.2 dBFS;',
  'the podcast is driven into a soft clipper and limited at −1.2 dBFS. Everything is 24 bit but the MP3 (192 kbit/s).',
];

interface Stem {
  planar: Float32Array[];
  samples: number;
}

const stemScores: readonly { character: Character; seconds: number; gain: number }[] = [
  { character: 'drama', seconds: 61, gain: 1 },
  { character: 'talk', seconds: 53, gain: 1 },
  { character: 'children', seconds: 47, gain: 0.9 },
  { character: 'advert', seconds: 41, gain: 0.9 },
];

/** Hats, 4 to 20 kHz, four in 3 s; and thuds, one in some seconds: what makes peaks. */
function percussion(samples: number, sampleRateHz: number, seed: number): Float32Array {
  const roll = dice(seed);
  const out = new Float32Array(samples);
  const top = lowPass(19_000, sampleRateHz);
  const lowShare = 1 - Math.exp((-2 * Math.PI * 150) / sampleRateHz);
  let at = Math.round(0.3 * sampleRateHz);
  while (at < samples) {
    const isThud = roll() < 0.12;
    const length = Math.min(samples - at, Math.round((isThud ? 0.35 : 0.12) * sampleRateHz));
    const level = (isThud ? 14 : 0.25) * (0.4 + 0.6 * roll());
    const decay = Math.exp(-1 / ((isThud ? 0.07 : 0.02) * sampleRateHz));
    let shape = level;
    let before = 0;
    let low = 0;
    for (let i = 0; i < length; i++, shape *= decay) {
      const white = 2 * roll() - 1;
      low += (white - low) * lowShare;
      const source = isThud
        ? Math.sin((2 * Math.PI * 70 * i) / sampleRateHz) * 0.7 +
          low * (3 * Math.sqrt(sampleRateHz / 48_000)) +
          white * 0.08
        : (white - before) * 0.7;
      before = white;
      out[at + i] += top(source) * shape;
    }
    at += Math.round((isThud ? 0.9 : 0.75) * (0.7 + 0.6 * roll()) * sampleRateHz);
  }
  return out;
}

function filled(samples: number, next: (i: number) => number): Float32Array {
  const out = new Float32Array(samples);
  for (let i = 0; i < samples; i++) out[i] = next(i);
  return out;
}

function makeStems(layout: Recipe['layout'], sampleRateHz: number): Stem[] {
  const audioChannels = layout === '5.1' ? 6 : 2;
  const programmes = stemScores.map(({ character, seconds, gain }, i) => {
    const score = { character, layout, seconds, sampleRateHz, seed: 100 * (i + 1) };
    const planar = synthesise(score).map((one) => filled(one.length, (k) => one[k] * gain));
    return { planar, samples: planar[0].length };
  });
  const length = Math.round(37 * sampleRateHz);
  const bed = Array.from({ length: audioChannels }, (_, i) => {
    const next = pink(7000 + i);
    const top = lowPass(19_000, sampleRateHz);
    return filled(length, () => top(next()));
  });
  const hits = Array.from({ length: audioChannels }, (_, i) =>
    percussion(length - 4567, sampleRateHz, 8000 + (i % 2)),
  );
  return [...programmes, { planar: bed, samples: length }, { planar: hits, samples: length - 4567 }];
}

/** Those made last: rows of one layout and rate follow one another. */
let made: { key: string; stems: Stem[] } | null = null;
function stemsFor(layout: Recipe['layout'], sampleRateHz: number): Stem[] {
  const key = `${layout} ${sampleRateHz}`;
  if (made?.key !== key) made = { key, stems: makeStems(layout, sampleRateHz) };
  return made.stems;
}

/** Adds a stem from an offset on, its gain wandering around `gain` in straight pieces of 10 ms. */
function add(out: Float64Array[], stem: Stem, offset: number, gain: number, wander: () => number): void {
  const samples = out[0].length;
  const piece = 480;
  let from = gain * wander();
  for (let start = 0; start < samples; start += piece) {
    const end = Math.min(samples, start + piece);
    const to = gain * wander();
    const slope = (to - from) / piece;
    const at = (offset + start) % stem.samples;
    for (let c = 0; c < out.length; c++) {
      const [target, source] = [out[c], stem.planar[c]];
      let place = at;
      let g = from;
      for (let i = start; i < end; i++) {
        target[i] += source[place] * g;
        g += slope;
        if (++place === stem.samples) place = 0;
      }
    }
    from = to;
  }
}

/** Gains around 1, by the piece of 10 ms: two slow sines of unlike periods. */
function wandering(roll: () => number, depth: number): () => number {
  const [a, b] = [0.005 + 0.01 * roll(), 0.0011 + 0.002 * roll()];
  let [p, q] = [6.28 * roll(), 6.28 * roll()];
  return () => 1 + depth * 0.5 * (Math.sin((p += a)) + Math.sin((q += b)));
}

const ceilings = { broadcast: -3.2, podcast: -1.2 };
const levels = { broadcast: 0.041, podcast: 0.115 };

function mixItem(stems: Stem[], recipe: Recipe, seed: number, samples: number): Float64Array[] {
  const roll = dice(seed);
  const out = stems[0].planar.map(() => new Float64Array(samples));
  const lead = Math.floor(roll() * 4);
  const kind = recipe.kind === 'podcast' ? 'podcast' : 'broadcast';
  // A drama's minutes lie further apart than a podcast's.
  // The demo's voices come out louder at higher rates.
  const rateGain = 48_000 / recipe.sampleRateHz;
  const level = rateGain * levels[kind] * 10 ** (((kind === 'podcast' ? 2 : 9) * (roll() - 0.5)) / 20);
  const gains = stems.map((_, i) => {
    if (i === lead) return 1;
    if (i < 4) return i === (lead + 1) % 4 ? 0.25 * roll() : 0;
    return i === 4 ? 0.02 + 0.06 * roll() : 0.2 + 0.9 * roll();
  });
  stems.forEach((stem, i) => {
    const offset = Math.floor(roll() * stem.samples);
    const wander = wandering(roll, 0.35);
    if (gains[i] > 0) add(out, stem, offset, gains[i] * level, wander);
  });
  if (kind === 'podcast') for (const one of out) for (let i = 0; i < samples; i++) one[i] = Math.tanh(one[i]);
  limit(out, ceilings[kind], recipe.sampleRateHz);
  return out;
}

function noiseItem(recipe: Recipe, seed: number, samples: number): Float64Array[] {
  const audioChannels = recipe.layout === '5.1' ? 6 : 2;
  return Array.from({ length: audioChannels }, (_, c) => {
    const next = recipe.kind === 'pink' ? pink(seed * 16 + c) : dice(seed * 16 + c);
    const out = new Float64Array(samples);
    if (recipe.kind === 'pink') for (let i = 0; i < samples; i++) out[i] = 0.5 * next();
    else for (let i = 0; i < samples; i++) out[i] = 0.5 * (2 * next() - 1);
    return out;
  });
}

/** The programme as planar items of a minute, the last one shorter; full scale 1.0. */
export function* itemsOf(recipe: Recipe): Generator<Float64Array[]> {
  const { kind, seconds, sampleRateHz } = recipe;
  const isNoise = kind === 'pink' || kind === 'white';
  const stems = isNoise ? [] : stemsFor(recipe.layout, sampleRateHz);
  const samplesInAll = Math.round(seconds * sampleRateHz);
  const most = itemSeconds * sampleRateHz;
  for (let done = 0, item = 1; done < samplesInAll; done += most, item++) {
    const samples = Math.min(most, samplesInAll - done);
    yield isNoise ? noiseItem(recipe, item, samples) : mixItem(stems, recipe, item, samples);
  }
}
