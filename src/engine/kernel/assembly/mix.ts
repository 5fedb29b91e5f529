/** The two lanes of a downmix, from those that are measured. */
import { filled, lanes, measured, row, wide, wideRow } from './rows';

let factors: usize = 0;

/** Factors as float64: those of the left side for every measured lane, then those of the right. */
export function factorsPointer(): usize {
  if (factors == 0) factors = heap.alloc(<usize>(measured * 16));
  return factors;
}

export function mix(frames: i32): void {
  for (let lane = measured; lane < lanes; lane++) {
    const mine = factors + <usize>((lane - measured) * measured * 8);
    for (let i = filled; i < filled + frames; i += 2) {
      let sum = f64x2.splat(0);
      for (let from = 0; from < measured; from++) {
        const factor = load<f64>(mine + <usize>(from * 8));
        if (factor == 0) continue;
        const x = wide
          ? v128.load(wideRow(from) + ((<usize>i) << 3))
          : f64x2.promote_low_f32x4(v128.load64_zero(row(from) + ((<usize>i) << 2)));
        sum = f64x2.add(sum, f64x2.mul(f64x2.splat(factor), x));
      }
      if (wide) v128.store(wideRow(lane) + ((<usize>i) << 3), sum);
      v128.store64_lane(row(lane) + ((<usize>i) << 2), f32x4.demote_f64x2_zero(sum), 0);
    }
  }
}
