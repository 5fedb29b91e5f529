/** Noise and a filter for the bench's material. */

/** Xorshift, 32 bit: uniform in [0, 1), the same for the same seed. */
export function dice(seed: number): () => number {
  let state = (Math.imul(seed, 2_654_435_761) ^ 0x9e3779b9) | 0 || 1;
  return () => {
    state ^= state << 13;
    state ^= state >>> 17;
    state ^= state << 5;
    return (state >>> 0) / 4_294_967_296;
  };
}

/** Pink noise of about 0.2 RMS: white noise through three leaky sums whose corners lie apart (common practice, no source). */
export function pink(seed: number): () => number {
  const roll = dice(seed);
  let [low, middle, high] = [0, 0, 0];
  return () => {
    const white = 2 * roll() - 1;
    low = 0.99765 * low + white * 0.099046;
    middle = 0.963 * middle + white * 0.2965164;
    high = 0.57 * high + white * 1.0526913;
    return (low + middle + high + white * 0.1848) * 0.2;
  };
}

/** Second-order low-pass, Q 0.707, by the bilinear transform: one sample in, one out. */
export function lowPass(hz: number, sampleRateHz: number): (x: number) => number {
  const k = Math.tan((Math.PI * hz) / sampleRateHz);
  const norm = 1 / (1 + Math.SQRT2 * k + k * k);
  const b0 = k * k * norm;
  const a1 = 2 * (k * k - 1) * norm;
  const a2 = (1 - Math.SQRT2 * k + k * k) * norm;
  let [s1, s2] = [0, 0];
  return (x) => {
    const y = b0 * x + s1;
    s1 = 2 * b0 * x - a1 * y + s2;
    s2 = b0 * x - a2 * y;
    return y;
  };
}
