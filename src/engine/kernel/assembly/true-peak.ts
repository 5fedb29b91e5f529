/**
 * True peaks of a step, exact and mostly uncomputed. Three tiers: groups of eight intervals that a bound keeps under what is
 * known already are skipped; of the rest the quarters of each interval are computed, four intervals at once; and only where
 * a bound over these allows it, every point of one interval. Bounds carry more than the rounding of float32 could add.
 */
import { lanes, origin, row } from './rows';

let taps: i32 = 0;
let points: i32 = 0;
let half: i32 = 0;
/** Groups to each side that an interval's samples may lie in. */
let reach: i32 = 0;
let gain: f32 = 0;
let curve: f32 = 0;
let quarterGain: f32 = 0;
let quarterCurve: f32 = 0;
/** Weights by tap, then point; and by tap the even, odd and middle halves of the quarters, each spread over a vector. */
let weights: usize = 0;
let quarters: usize = 0;
/** Per group: largest sample, largest second difference. */
let groups: usize = 0;
let bends: usize = 0;
let found: usize = 0;

/** Per lane: largest true peak (float64 of a float32) and its place. */
let totals: usize = 0;
/** Largest of the step over the measured lanes, and what the series takes no account of. */
export let stepPeak: f32 = 0;
let floor: f32 = 0;

const slack: f32 = 2e-5;

export function configurePeaks(
  tapCount: i32,
  pointCount: i32,
  allGain: f32,
  allCurve: f32,
  betweenGain: f32,
  betweenCurve: f32,
  seriesFloor: f32,
  longestStep: i32,
): void {
  taps = tapCount;
  points = pointCount;
  half = taps >> 1;
  reach = (half + 7) >> 3;
  gain = allGain;
  curve = allCurve;
  quarterGain = betweenGain;
  quarterCurve = betweenCurve;
  floor = seriesFloor;
  weights = heap.alloc(<usize>(taps * points * 4));
  quarters = heap.alloc(<usize>(half * 48));
  const most = <usize>(((longestStep + 2 * half) >> 3) + 2 * reach + 4);
  groups = heap.alloc(most * 4);
  bends = heap.alloc(most * 4);
  found = heap.alloc(<usize>(points * 4));
  totals = heap.alloc(<usize>(lanes * 16));
  memory.fill(totals, 0, <usize>(lanes * 16));
}
export function weightsPointer(): usize {
  return weights;
}
/** To be called once the weights are written. */
export function prepareQuarters(): void {
  const quarter = points >> 2;
  for (let k = 0; k < half; k++) {
    const first = load<f32>(weights + <usize>((k * points + quarter) * 4));
    const mirrored = load<f32>(weights + <usize>(((taps - 1 - k) * points + quarter) * 4));
    const middle = load<f32>(weights + <usize>((k * points + 2 * quarter) * 4));
    const at = quarters + <usize>(k * 48);
    v128.store(at, f32x4.splat((first + mirrored) * 0.5));
    v128.store(at, f32x4.splat((first - mirrored) * 0.5), 16);
    v128.store(at, f32x4.splat(middle), 32);
  }
}

export function laneTruePeak(lane: i32): f64 {
  return load<f64>(totals + <usize>(lane * 16));
}
export function laneTruePeakAt(lane: i32): f64 {
  return load<f64>(totals + <usize>(lane * 16), 8);
}
export function beginStep(): void {
  stepPeak = 0;
}
/** True peaks up to the floor are told as sample peaks. */
export function stepPeakOver(samplePeak: f32): f32 {
  return stepPeak > floor ? stepPeak : samplePeak;
}

/** What a point must exceed to matter. A lane of the downmix has no part in the step's. */
function limitOf(lane: i32, counts: bool): f32 {
  const most = <f32>laneTruePeak(lane);
  return counts ? min(max(stepPeak, floor), most) : most;
}

function largestOf(v: v128): f32 {
  const pairs = f32x4.pmax(v, v128.shuffle<i32>(v, v, 2, 3, 0, 1));
  return f32x4.extract_lane(f32x4.pmax(pairs, v128.shuffle<i32>(pairs, pairs, 1, 0, 3, 2)), 0);
}

/** Takes in every interval that begins at a sample from `from` up to `to`. */
export function peaksOf(lane: i32, from: i32, to: i32, counts: bool): void {
  const start = row(lane);
  let most = f32x4.splat(0);
  for (let i = from - half; i < to + half; i += 4)
    most = f32x4.pmax(most, f32x4.abs(v128.load(start + ((<usize>i) << 2))));
  if (largestOf(most) * gain * (1 + slack) <= limitOf(lane, counts)) return;

  const count = (to - from + 7) >> 3;
  let loudest = 0;
  let loudestPeak: f32 = -1;
  let mostBend: f32 = 0;
  for (let j = -reach; j < count + reach; j++) {
    const at = start + ((<usize>(from + 8 * j)) << 2);
    const a = v128.load(at);
    const b = v128.load(at, 16);
    const c = v128.load(at, 20); // one sample on: the end of the group's last interval
    const peak = largestOf(f32x4.pmax(f32x4.pmax(f32x4.abs(a), f32x4.abs(b)), f32x4.abs(c)));
    const a1 = v128.load(at, 4);
    const a2 = v128.load(at, 8);
    const b2 = v128.load(at, 24);
    const bend = largestOf(
      f32x4.pmax(
        f32x4.abs(f32x4.add(f32x4.sub(a, f32x4.add(a1, a1)), a2)),
        f32x4.abs(f32x4.add(f32x4.sub(b, f32x4.add(c, c)), b2)),
      ),
    );
    store<f32>(groups + <usize>((j + reach) * 4), peak);
    store<f32>(bends + <usize>((j + reach) * 4), bend);
    if (bend > mostBend) mostBend = bend;
    if (j >= 0 && j < count && peak > loudestPeak) {
      loudestPeak = peak;
      loudest = j;
    }
  }
  // The loudest first: what it reads spares most of the others.
  examine(lane, from, to, loudest, counts);
  const most_ = largestOf(most) * slack;
  const widest = curve * mostBend + most_;
  for (let j = 0; j < count; j++) {
    if (j == loudest) continue;
    if (load<f32>(groups + <usize>((j + reach) * 4)) + widest <= limitOf(lane, counts)) continue;
    examine(lane, from, to, j, counts);
  }
}

function examine(lane: i32, from: i32, to: i32, j: i32, counts: bool): void {
  let near: f32 = 0;
  let bend: f32 = 0;
  for (let k = j; k <= j + 2 * reach; k++) {
    near = max(near, load<f32>(groups + <usize>(k * 4)));
    bend = max(bend, load<f32>(bends + <usize>(k * 4)));
  }
  const rounding = near * slack;
  const own = load<f32>(groups + <usize>((j + reach) * 4));
  if (min(own + curve * bend, gain * near) + rounding <= limitOf(lane, counts)) return;
  const extra = f32x4.splat(min(quarterGain * near, quarterCurve * bend) + rounding);
  const start = row(lane);
  for (let i = from + 8 * j; i < min(to, from + 8 * j + 8); i += 4) {
    const at = start + ((<usize>i) << 2);
    let low = at - <usize>((half - 1) * 4);
    let high = at + <usize>(half * 4);
    let even = f32x4.splat(0);
    let odd = f32x4.splat(0);
    let middle = f32x4.splat(0);
    for (let q = quarters, end = quarters + <usize>(half * 48); q < end; q += 48) {
      const a = v128.load(low);
      const b = v128.load(high);
      const sum = f32x4.add(a, b);
      const difference = f32x4.sub(a, b);
      even = f32x4.add(even, f32x4.mul(sum, v128.load(q)));
      odd = f32x4.add(odd, f32x4.mul(difference, v128.load(q, 16)));
      middle = f32x4.add(middle, f32x4.mul(sum, v128.load(q, 32)));
      low += 4;
      high -= 4;
    }
    // Of the points at one and three quarters, mirror images: max(|e + o|, |e - o|) = |e| + |o|.
    const outer = f32x4.add(f32x4.abs(even), f32x4.abs(odd));
    const ends = f32x4.pmax(f32x4.abs(v128.load(at)), f32x4.abs(v128.load(at, 4)));
    const bound = f32x4.add(f32x4.pmax(f32x4.pmax(outer, f32x4.abs(middle)), ends), extra);
    let open = i32x4.bitmask(f32x4.gt(bound, f32x4.splat(limitOf(lane, counts))));
    while (open != 0) {
      const k = ctz(open);
      open &= open - 1;
      if (i + k < to && f32Of(bound, k) > limitOf(lane, counts)) compute(lane, i + k, counts);
    }
  }
}

const spread = memory.data(16, 16);
function f32Of(v: v128, k: i32): f32 {
  v128.store(spread, v);
  return load<f32>(spread + <usize>(k * 4));
}

/** Every point of one interval. */
function compute(lane: i32, i: i32, counts: bool): void {
  let at = row(lane) + ((<usize>(i - half + 1)) << 2);
  const end = at + <usize>(taps * 4);
  let w = weights;
  let a = f32x4.splat(0);
  let b = f32x4.splat(0);
  let most: v128;
  if (points == 16) {
    let c = f32x4.splat(0);
    let d = f32x4.splat(0);
    for (; at < end; at += 4) {
      const x = v128.load32_splat(at);
      a = f32x4.add(a, f32x4.mul(v128.load(w), x));
      b = f32x4.add(b, f32x4.mul(v128.load(w, 16), x));
      c = f32x4.add(c, f32x4.mul(v128.load(w, 32), x));
      d = f32x4.add(d, f32x4.mul(v128.load(w, 48), x));
      w += 64;
    }
    c = f32x4.abs(c);
    d = f32x4.abs(d);
    v128.store(found, c, 32);
    v128.store(found, d, 48);
    most = f32x4.pmax(c, d);
  } else {
    for (; at < end; at += 4) {
      const x = v128.load32_splat(at);
      a = f32x4.add(a, f32x4.mul(v128.load(w), x));
      b = f32x4.add(b, f32x4.mul(v128.load(w, 16), x));
      w += 32;
    }
    most = f32x4.splat(0);
  }
  a = f32x4.abs(a);
  b = f32x4.abs(b);
  v128.store(found, a);
  v128.store(found, b, 16);
  const peak = largestOf(f32x4.pmax(most, f32x4.pmax(a, b)));
  if (counts && peak > stepPeak) stepPeak = peak;
  const mine = totals + <usize>(lane * 16);
  const known = load<f64>(mine);
  if (<f64>peak < known || peak == 0) return;
  let point = 0;
  while (load<f32>(found + <usize>(point * 4)) != peak) point++;
  const place = origin + <f64>i + <f64>point / <f64>points;
  // Of equal peaks the first in time, in whatever order they were found.
  if (<f64>peak == known && place >= load<f64>(mine, 8)) return;
  store<f64>(mine, <f64>peak);
  store<f64>(mine, place, 8);
}
