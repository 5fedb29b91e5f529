/** A series whose length is not known beforehand; what was expected takes no growing. */
export class GrowingFloats<T extends Float32Array | Float64Array> {
  #values: T;
  #length = 0;

  /** `make` gives an empty series of so many values. */
  constructor(
    private readonly make: (length: number) => T,
    expected = 0,
  ) {
    this.#values = make(Math.max(expected, 1 << 10));
  }

  push(value: number): void {
    if (this.#length === this.#values.length) {
      const bigger = this.make(Math.ceil(this.#length * 1.5));
      bigger.set(this.#values);
      this.#values = bigger;
    }
    this.#values[this.#length++] = value;
  }

  view(): T {
    return this.#values.subarray(0, this.#length) as T;
  }
}

export const doubles = (length: number): Float64Array<ArrayBufferLike> => new Float64Array(length);
export const floats = (length: number): Float32Array<ArrayBufferLike> => new Float32Array(length);
