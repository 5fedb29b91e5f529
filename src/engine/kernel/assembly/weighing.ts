/**
 * K-weighting (ITU-R BS.1770-5 Annex 1) and the sums of each step, two lanes side by side in double precision, in the order
 * of operations of the scalar twin. What a pair of lanes remembers lies in one record of vectors.
 */
import { boundary, filled, lanes, row, wide, wideRow } from './rows';
import { recordOf, setLeftRight, setWeighted } from './records';

const memories: i32 = 11; // x1 x2 y1 y2 v1 z1 z2, then the sums: weighted, energy, all samples, left times right
let memoryOf: usize = 0;
/** Steps whose energies are on record. */
let weighedSteps: f64 = 0;
let p1: f64 = 0;
let p2: f64 = 0;
let a1: f64 = 0;
let a2: f64 = 0;
let c1: f64 = 0;
let c2: f64 = 0;
let weightedScale: f64 = 0;
let samplesOfStep: f64 = 0;
let pair: bool = false;

export function configureWeighting(
  b1: f64,
  b2: f64,
  shelf1: f64,
  shelf2: f64,
  high1: f64,
  high2: f64,
  scale: f64,
  stepSamples: f64,
  hasPair: bool,
): void {
  p1 = b1;
  p2 = b2;
  a1 = shelf1;
  a2 = shelf2;
  c1 = high1;
  c2 = high2;
  weightedScale = scale;
  samplesOfStep = stepSamples;
  pair = hasPair;
  const bytes = <usize>(((lanes + 1) >> 1) * memories * 16);
  memoryOf = heap.alloc(bytes);
  memory.fill(memoryOf, 0, bytes);
}

/** Sum of all samples of a lane. */
export function laneSum(lane: i32): f64 {
  return load<f64>(memoryOf + <usize>(((lane >> 1) * memories + 9) * 16 + (lane & 1) * 8));
}

/** Weighs the newest frames of every lane; a step that they complete is put on record. */
export function weigh(frames: i32): void {
  for (let first = 0; first < lanes; first += 2) {
    if (wide) weighPair<f64>(first, frames);
    else weighPair<f32>(first, frames);
  }
  const end = filled + frames;
  while (boundary(weighedSteps + 1) <= end) weighedSteps += 1;
}

function frameAt<T>(left: usize, right: usize, at: i32): v128 {
  if (sizeof<T>() == 8)
    return v128.load64_lane(right + ((<usize>at) << 3), v128.load64_zero(left + ((<usize>at) << 3)), 1);
  return f64x2.promote_low_f32x4(
    v128.load32_lane(right + ((<usize>at) << 2), v128.load32_zero(left + ((<usize>at) << 2)), 1),
  );
}

function weighPair<T>(first: i32, frames: i32): void {
  const left = sizeof<T>() == 8 ? wideRow(first) : row(first);
  const right = sizeof<T>() == 8 ? wideRow(first + 1) : row(first + 1);
  const mine = memoryOf + <usize>((first >> 1) * memories * 16);
  const vp1 = f64x2.splat(p1);
  const vp2 = f64x2.splat(p2);
  const va1 = f64x2.splat(a1);
  const va2 = f64x2.splat(a2);
  const vc1 = f64x2.splat(c1);
  const vc2 = f64x2.splat(c2);
  let x1 = v128.load(mine);
  let x2 = v128.load(mine, 16);
  let y1 = v128.load(mine, 32);
  let y2 = v128.load(mine, 48);
  let v1 = v128.load(mine, 64);
  let z1 = v128.load(mine, 80);
  let z2 = v128.load(mine, 96);
  let weighted = v128.load(mine, 112);
  let energy = v128.load(mine, 128);
  let sum = v128.load(mine, 144);
  let product = v128.load(mine, 160);
  let step = weighedSteps;
  let at = filled;
  const end = at + frames;
  while (at < end) {
    const stepEnd = boundary(step + 1);
    const stop = min(end, stepEnd);
    for (; at < stop; at++) {
      const x = frameAt<T>(left, right, at);
      let y = f64x2.add(x, f64x2.mul(vp1, x1));
      y = f64x2.add(y, f64x2.mul(vp2, x2));
      y = f64x2.sub(y, f64x2.mul(va2, y2));
      y = f64x2.sub(y, f64x2.mul(va1, y1));
      const v = f64x2.sub(y, y1);
      let z = f64x2.sub(f64x2.sub(v, v1), f64x2.mul(vc2, z2));
      z = f64x2.sub(z, f64x2.mul(vc1, z1));
      weighted = f64x2.add(weighted, f64x2.mul(z, z));
      energy = f64x2.add(energy, f64x2.mul(x, x));
      sum = f64x2.add(sum, x);
      product = f64x2.add(product, f64x2.mul(x, v128.shuffle<f64>(x, x, 1, 0)));
      x2 = x1;
      x1 = x;
      y2 = y1;
      y1 = y;
      v1 = v;
      z2 = z1;
      z1 = z;
    }
    if (at == stepEnd) {
      const record = recordOf(step);
      const a = f64x2.mul(weighted, f64x2.splat(weightedScale));
      const b = f64x2.div(energy, f64x2.splat(samplesOfStep));
      setWeighted(record, first, f64x2.extract_lane(a, 0), f64x2.extract_lane(b, 0));
      if (first + 1 < lanes)
        setWeighted(record, first + 1, f64x2.extract_lane(a, 1), f64x2.extract_lane(b, 1));
      if (first == 0) setLeftRight(record, pair ? f64x2.extract_lane(product, 0) / samplesOfStep : 0);
      weighted = f64x2.splat(0);
      energy = f64x2.splat(0);
      product = f64x2.splat(0);
      step += 1;
    }
  }
  v128.store(mine, x1);
  v128.store(mine, x2, 16);
  v128.store(mine, y1, 32);
  v128.store(mine, y2, 48);
  v128.store(mine, v1, 64);
  v128.store(mine, z1, 80);
  v128.store(mine, z2, 96);
  v128.store(mine, weighted, 112);
  v128.store(mine, energy, 128);
  v128.store(mine, sum, 144);
  v128.store(mine, product, 160);
}
