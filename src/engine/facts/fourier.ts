/** A discrete Fourier transform of a power-of-two length, in place, radix 2. Real and imaginary parts apart. */
export class Fourier {
  readonly #cos: Float64Array;
  readonly #sin: Float64Array;
  readonly #swaps: Uint32Array;

  constructor(readonly length: number) {
    this.#cos = Float64Array.from({ length: length / 2 }, (_, k) => Math.cos((2 * Math.PI * k) / length));
    this.#sin = Float64Array.from({ length: length / 2 }, (_, k) => -Math.sin((2 * Math.PI * k) / length));
    const bits = Math.log2(length);
    this.#swaps = Uint32Array.from({ length }, (_, i) => {
      let mirrored = 0;
      for (let b = 0; b < bits; b++) mirrored |= ((i >> b) & 1) << (bits - 1 - b);
      return mirrored;
    });
  }

  transform(re: Float64Array, im: Float64Array): void {
    const n = this.length;
    for (let i = 0; i < n; i++) {
      const j = this.#swaps[i];
      if (j <= i) continue;
      [re[i], re[j]] = [re[j], re[i]];
      [im[i], im[j]] = [im[j], im[i]];
    }
    for (let half = 1; half < n; half *= 2) {
      const stride = n / (2 * half);
      for (let start = 0; start < n; start += 2 * half)
        for (let k = 0, w = 0; k < half; k++, w += stride) {
          const [a, b] = [start + k, start + k + half];
          const tr = re[b] * this.#cos[w] - im[b] * this.#sin[w];
          const ti = re[b] * this.#sin[w] + im[b] * this.#cos[w];
          re[b] = re[a] - tr;
          im[b] = im[a] - ti;
          re[a] += tr;
          im[a] += ti;
        }
    }
  }
}
