/**
 * Random programmes on the ground where two meters ought to agree (MEASUREMENT, "Accuracy to show"): 60 s and more, mono to
 * 5.1, 32 kHz and above, band-limited, with changes of level and pauses. The same for the same seed.
 */
import { noise } from './wav.ts';

export interface RandomProgramme {
  seed: number;
  sampleRateHz: number;
  audioChannels: 1 | 2 | 6;
  planar: Float64Array[];
}

/** Numbers in [0, 1) by a seed. */
export function dice(seed: number): () => number {
  const first = noise(seed * 7919 + 1, 4096, 0.5);
  let at = 16;
  return () => first[at++ % first.length] + 0.5;
}

const loopSeconds = 5;
const made = new Map<string, Float64Array>();

/** Noise, tilted towards the lows by `tilt`, and cut off by a windowed sinc. A few of a kind are made, and used in loops. */
function band(kind: number, sampleRateHz: number): Float64Array {
  const key = `${kind} ${sampleRateHz}`;
  const known = made.get(key);
  if (known) return known;
  const raw = noise(1000 + kind, loopSeconds * sampleRateHz + 64 * kind, 1);
  const tilt = [0, 0.5, 0.9, 0.98][kind];
  for (let i = 1; i < raw.length; i++) raw[i] += tilt * raw[i - 1];
  // The cut's skirt ends at 16 kHz, or at 0.45 of a low rate.
  const cut = (Math.min(16_000, 0.45 * sampleRateHz) - 1_500) / sampleRateHz;
  const half = 64;
  const kernel = Float64Array.from({ length: 2 * half + 1 }, (_, i) => {
    const t = i - half;
    const window = 0.42 + 0.5 * Math.cos((Math.PI * t) / half) + 0.08 * Math.cos((2 * Math.PI * t) / half);
    return window * (t === 0 ? 2 * cut : Math.sin(2 * Math.PI * cut * t) / (Math.PI * t));
  });
  const { length } = raw;
  // Filtered as a ring, so that the loop has no seam.
  const ring = new Float64Array(length + 2 * half);
  for (let n = 0; n < ring.length; n++) ring[n] = raw[(n + length - half) % length];
  const out = new Float64Array(length);
  let most = 0;
  for (let n = 0; n < length; n++) {
    let sum = 0;
    for (let k = 0; k <= 2 * half; k++) sum += ring[n + k] * kernel[k];
    out[n] = sum;
    most = Math.max(most, Math.abs(sum));
  }
  for (let n = 0; n < length; n++) out[n] /= most;
  made.set(key, out);
  return out;
}

/**
 * Gains by the sample: 3 s of silence, then levels of 1 to 9 s between −42 and 0 dB, now and then a pause, joined in 50 ms.
 * Silence first since ffmpeg counts windows of 3 s that begin before the programme, filled with silence; ours are full ones.
 */
function envelope(roll: () => number, samples: number, sampleRateHz: number): Float64Array {
  const out = new Float64Array(samples);
  const ramp = 0.05 * sampleRateHz;
  for (let at = 3 * sampleRateHz, from = 0; at < samples;) {
    const to = roll() < 0.15 ? 0 : 10 ** ((-42 * roll() ** 2) / 20);
    const end = Math.min(samples, at + Math.round((1 + 8 * roll()) * sampleRateHz));
    for (let n = at; n < end; n++) {
      const t = Math.min(1, (n - at) / ramp);
      out[n] = from + (to - from) * 0.5 * (1 - Math.cos(Math.PI * t));
    }
    from = to;
    at = end;
  }
  return out;
}

/** Most are stereo at 48 kHz, as deliveries are. */
export function randomProgramme(seed: number): RandomProgramme {
  const roll = dice(seed);
  const sampleRateHz = [48_000, 48_000, 48_000, 44_100, 32_000, 48_000, 96_000, 44_100][seed % 8];
  const audioChannels = ([2, 1, 2, 2, 1, 2, 2, 1, 6] as const)[seed % 9];
  const samples = Math.round((60 + 5 * roll()) * sampleRateHz);
  const common = envelope(roll, samples, sampleRateHz);
  const level = 10 ** ((-1 - 20 * roll()) / 20);
  const planar = Array.from({ length: audioChannels }, () => {
    const stem = band(Math.floor(roll() * 4), sampleRateHz);
    const gain = level * 10 ** ((-12 * roll()) / 20);
    const own = roll() < 0.3 ? envelope(roll, samples, sampleRateHz) : common;
    let place = Math.floor(roll() * stem.length);
    const out = new Float64Array(samples);
    for (let n = 0; n < samples; n++) {
      if (++place >= stem.length) place = 0;
      out[n] = own[n] * gain * stem[place];
    }
    return out;
  });
  return { seed, sampleRateHz, audioChannels, planar };
}
