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
    const cos = this.#cos;
    const sin = this.#sin;
    const swaps = this.#swaps;
    for (let i = 0; i < n; i++) {
      const j = swaps[i];
      if (j <= i) continue;
      const r = re[i];
      const m = im[i];
      re[i] = re[j];
      im[i] = im[j];
      re[j] = r;
      im[j] = m;
    }
    for (let half = 1; half < n; half *= 2) {
      const stride = n / (2 * half);
      for (let k = 0, w = 0; k < half; k++, w += stride) {
        const c = cos[w];
        const s = sin[w];
        for (let a = k; a < n; a += 2 * half) {
          const b = a + half;
          const tr = re[b] * c - im[b] * s;
          const ti = re[b] * s + im[b] * c;
          re[b] = re[a] - tr;
          im[b] = im[a] - ti;
          re[a] += tr;
          im[a] += ti;
        }
      }
    }
  }
}
