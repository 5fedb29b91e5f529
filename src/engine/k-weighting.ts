/**
 * K-weighting (ITU-R BS.1770-5, Annex 1): a high shelf, then a high-pass, re-derived for any sample rate by the bilinear
 * transform from the analogue prototypes that the standard's 48 kHz tables stand for.
 */

/** `y[n] = b0 x[n] + b1 x[n-1] + b2 x[n-2] - a1 y[n-1] - a2 y[n-2]` */
export interface Biquad {
  b0: number;
  b1: number;
  b2: number;
  a1: number;
  a2: number;
}

// Recovered by inverting Tables 1 and 2 of the standard, exact to 1e-12 (the high-pass to 1e-9).
const shelf = {
  hz: 1681.974450955533,
  q: 0.7071752369554196,
  gainDb: 3.999843853973347,
  exponent: 0.4996667741545416,
};
const highPass = { hz: 38.13547087602444, q: 0.5003270373238773 };

const denominator = (hz: number, q: number, sampleRateHz: number) => {
  const k = Math.tan((Math.PI * hz) / sampleRateHz);
  return { k, a0: 1 + k / q + k * k };
};

/** Both stages for a rate in Hz. At 48 kHz they equal the standard's tables to 1e-12 (Table 2 to 1e-9). */
export function kWeighting(sampleRateHz: number): [shelf: Biquad, highPass: Biquad] {
  const s = denominator(shelf.hz, shelf.q, sampleRateHz);
  const vh = 10 ** (shelf.gainDb / 20);
  const vb = vh ** shelf.exponent;
  const h = denominator(highPass.hz, highPass.q, sampleRateHz);
  // Table 2's numerator is [1, -2, 1], not divided by a0: the scale keeps every rate at the 48 kHz response.
  const g = denominator(highPass.hz, highPass.q, 48_000).a0 / h.a0;
  return [
    {
      b0: (vh + (vb * s.k) / shelf.q + s.k * s.k) / s.a0,
      b1: (2 * (s.k * s.k - vh)) / s.a0,
      b2: (vh - (vb * s.k) / shelf.q + s.k * s.k) / s.a0,
      a1: (2 * (s.k * s.k - 1)) / s.a0,
      a2: (1 - s.k / shelf.q + s.k * s.k) / s.a0,
    },
    {
      b0: g,
      b1: -2 * g,
      b2: g,
      a1: (2 * (h.k * h.k - 1)) / h.a0,
      a2: (1 - h.k / highPass.q + h.k * h.k) / h.a0,
    },
  ];
}

/** Gain in dB of a cascade of biquads at `hz`. */
export function responseDb(stages: readonly Biquad[], hz: number, sampleRateHz: number): number {
  const w = (2 * Math.PI * hz) / sampleRateHz;
  const [c1, s1, c2, s2] = [Math.cos(w), Math.sin(w), Math.cos(2 * w), Math.sin(2 * w)];
  let db = 0;
  for (const f of stages) {
    const top = (f.b0 + f.b1 * c1 + f.b2 * c2) ** 2 + (f.b1 * s1 + f.b2 * s2) ** 2;
    const bottom = (1 + f.a1 * c1 + f.a2 * c2) ** 2 + (f.a1 * s1 + f.a2 * s2) ** 2;
    db += 10 * Math.log10(top / bottom);
  }
  return db;
}

/** Both stages with the first factor of each numerator taken out; `energyScale` puts it back where energies are summed. */
export function scaledWeighting(sampleRateHz: number) {
  const [shelf, highPass] = kWeighting(sampleRateHz);
  return {
    p1: shelf.b1 / shelf.b0,
    p2: shelf.b2 / shelf.b0,
    a1: shelf.a1,
    a2: shelf.a2,
    c1: highPass.a1,
    c2: highPass.a2,
    energyScale: (shelf.b0 * highPass.b0) ** 2,
  };
}
