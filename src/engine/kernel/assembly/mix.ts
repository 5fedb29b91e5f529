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
    if (wide) mixWide(lane, mine, frames);
    else mixNarrow(lane, mine, frames);
  }
}

function mixNarrow(lane: i32, mine: usize, frames: i32): void {
  const to = row(lane) + ((<usize>filled) << 2);
  const bytes = (<usize>frames) << 2;
  memory.fill(to, 0, bytes);
  for (let from = 0; from < measured; from++) {
    const factor = <f32>load<f64>(mine + <usize>(from * 8));
    if (factor == 0) continue;
    const start = row(from) + ((<usize>filled) << 2);
    const by = f32x4.splat(factor);
    for (let i: usize = 0; i < bytes; i += 16)
      v128.store(to + i, f32x4.add(v128.load(to + i), f32x4.mul(by, v128.load(start + i))));
  }
}

function mixWide(lane: i32, mine: usize, frames: i32): void {
  for (let i = filled; i < filled + frames; i += 2) {
    let sum = f64x2.splat(0);
    for (let from = 0; from < measured; from++) {
      const factor = load<f64>(mine + <usize>(from * 8));
      if (factor == 0) continue;
      sum = f64x2.add(sum, f64x2.mul(f64x2.splat(factor), v128.load(wideRow(from) + ((<usize>i) << 3))));
    }
    v128.store(wideRow(lane) + ((<usize>i) << 3), sum);
    v128.store64_lane(row(lane) + ((<usize>i) << 2), f32x4.demote_f64x2_zero(sum), 0);
  }
}
