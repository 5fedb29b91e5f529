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
/** Per group a vector over its samples and one over its second differences: the largest is the largest of its four. */
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
  const most = <usize>(((longestStep + 2 * half) >> 3) + 4 * reach + 8);
  groups = heap.alloc(most * 16);
  bends = heap.alloc(most * 16);
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

/** First group of a step and one behind its last: eight intervals each, counted from the step's first sample. */
let firstGroup: i32 = 0;
let endGroup: i32 = 0;
/** Whether a group of the step, with the sample behind it, is all zeros. */
export let quiet: bool = false;

function groupAt(j: i32): usize {
  return groups + ((<usize>(j - firstGroup + reach)) << 4);
}
function bendAt(j: i32): usize {
  return bends + ((<usize>(j - firstGroup + reach)) << 4);
}

/**
 * Looks over a step and what lies around it: the peak of its samples, as float32, and whether it holds nine zeros in a row
 * at places 8 apart (of 16 zeros in a row some nine are). `lead` and `trail`: samples around it whose intervals count for it.
 */
export function survey(lane: i32, from: i32, to: i32, lead: i32, trail: i32): f32 {
  firstGroup = -((lead + 7) >> 3);
  endGroup = (to + trail - from + 7) >> 3;
  quiet = false;
  const start = row(lane) + ((<usize>from) << 2);
  let peaks = f32x4.splat(0);
  let silent = 0;
  const last = (to - from) >> 3;
  for (let j = firstGroup - reach; j < endGroup + reach; j++) {
    const at = start + <usize>(j << 5);
    const body = f32x4.pmax(f32x4.abs(v128.load(at)), f32x4.abs(v128.load(at, 16)));
    const all = f32x4.pmax(body, f32x4.abs(v128.load(at, 20))); // with the end of the last interval
    v128.store(groupAt(j), all);
    if (j < 0 || from + 8 * j >= to) continue;
    silent |= <i32>!v128.any_true(all);
    if (j < last) peaks = f32x4.pmax(peaks, body);
  }
  quiet = silent != 0;
  let peak = largestOf(peaks);
  for (let i = last << 3; i < to - from; i++) peak = max(peak, abs(load<f32>(start + ((<usize>i) << 2))));
  return peak;
}

/** Takes in the intervals of the step that was surveyed last. */
export function peaksOf(lane: i32, from: i32, end: i32, peak: f32, counts: bool): void {
  // Of the samples around the step only the groups that its intervals reach.
  let around = f32x4.splat(0);
  for (let k = 0; k < reach + 1; k++) {
    around = f32x4.pmax(around, v128.load(groupAt(firstGroup - reach + k)));
    around = f32x4.pmax(around, v128.load(groupAt(endGroup + reach - 1 - k)));
  }
  const most = max(peak, largestOf(around));
  if (most * gain * (1 + slack) <= limitOf(lane, counts)) return;

  const start = row(lane) + ((<usize>from) << 2);
  let mostBends = f32x4.splat(0);
  for (let j = firstGroup - reach; j < endGroup + reach; j++) {
    const at = start + <usize>(j << 5);
    const a1 = v128.load(at, 4);
    const b1 = v128.load(at, 20);
    const a = f32x4.sub(f32x4.add(v128.load(at), v128.load(at, 8)), f32x4.add(a1, a1));
    const b = f32x4.sub(f32x4.add(v128.load(at, 16), v128.load(at, 24)), f32x4.add(b1, b1));
    const bend = f32x4.pmax(f32x4.abs(a), f32x4.abs(b));
    v128.store(bendAt(j), bend);
    mostBends = f32x4.pmax(mostBends, bend);
  }
  // The loudest first: what it reads spares most of the others.
  let loudest = firstGroup;
  const top = f32x4.splat(peak);
  for (let j = firstGroup; j < endGroup; j++)
    if (v128.any_true(f32x4.ge(v128.load(groupAt(j)), top))) {
      loudest = j;
      break;
    }
  examine(lane, from, end, loudest, counts);
  const widest = curve * largestOf(mostBends) + most * slack;
  for (let j = firstGroup; j < endGroup; j++) {
    const loud = f32x4.gt(v128.load(groupAt(j)), f32x4.splat(limitOf(lane, counts) - widest));
    if (v128.any_true(loud) && j != loudest) examine(lane, from, end, j, counts);
  }
}

function examine(lane: i32, from: i32, end: i32, j: i32, counts: bool): void {
  let near = v128.load(groupAt(j));
  let bend = v128.load(bendAt(j));
  const own = largestOf(near);
  for (let k = 1; k <= reach; k++) {
    near = f32x4.pmax(near, f32x4.pmax(v128.load(groupAt(j - k)), v128.load(groupAt(j + k))));
    bend = f32x4.pmax(bend, f32x4.pmax(v128.load(bendAt(j - k)), v128.load(bendAt(j + k))));
  }
  const most = largestOf(near);
  const bent = largestOf(bend);
  const rounding = most * slack;
  if (min(own + curve * bent, gain * most) + rounding <= limitOf(lane, counts)) return;
  const first = from + 8 * j;
  const at = row(lane) + ((<usize>first) << 2);
  let low = at - <usize>((half - 1) * 4);
  let high = at + <usize>(half * 4);
  let even0 = f32x4.splat(0);
  let even1 = f32x4.splat(0);
  let odd0 = f32x4.splat(0);
  let odd1 = f32x4.splat(0);
  let middle0 = f32x4.splat(0);
  let middle1 = f32x4.splat(0);
  for (let q = quarters, stop = quarters + <usize>(half * 48); q < stop; q += 48) {
    const e = v128.load(q);
    const o = v128.load(q, 16);
    const m = v128.load(q, 32);
    const a0 = v128.load(low);
    const b0 = v128.load(high);
    const sum0 = f32x4.add(a0, b0);
    even0 = f32x4.add(even0, f32x4.mul(sum0, e));
    odd0 = f32x4.add(odd0, f32x4.mul(f32x4.sub(a0, b0), o));
    middle0 = f32x4.add(middle0, f32x4.mul(sum0, m));
    const a1 = v128.load(low, 16);
    const b1 = v128.load(high, 16);
    const sum1 = f32x4.add(a1, b1);
    even1 = f32x4.add(even1, f32x4.mul(sum1, e));
    odd1 = f32x4.add(odd1, f32x4.mul(f32x4.sub(a1, b1), o));
    middle1 = f32x4.add(middle1, f32x4.mul(sum1, m));
    low += 4;
    high -= 4;
  }
  const extra = min(quarterGain * most, quarterCurve * bent) + rounding;
  computeOpen(lane, at, first, end, counts, even0, odd0, middle0, extra);
  computeOpen(lane, at + 16, first + 4, end, counts, even1, odd1, middle1, extra);
}

/** Computes those of four intervals that may exceed what is known. */
function computeOpen(
  lane: i32,
  at: usize,
  first: i32,
  end: i32,
  counts: bool,
  even: v128,
  odd: v128,
  middle: v128,
  extra: f32,
): void {
  // Of the points at one and three quarters, mirror images: max(|e + o|, |e - o|) = |e| + |o|.
  const outer = f32x4.add(f32x4.abs(even), f32x4.abs(odd));
  const ends = f32x4.pmax(f32x4.abs(v128.load(at)), f32x4.abs(v128.load(at, 4)));
  const largest = f32x4.pmax(f32x4.pmax(outer, f32x4.abs(middle)), ends);
  let open = i32x4.bitmask(f32x4.gt(largest, f32x4.splat(limitOf(lane, counts) - extra)));
  if (open == 0) return;
  v128.store(spread, largest);
  for (; open != 0; open &= open - 1) {
    const k = ctz(open);
    if (first + k < end && load<f32>(spread + <usize>(k * 4)) > limitOf(lane, counts) - extra)
      compute(lane, first + k, counts);
  }
}

const spread = memory.data(16, 16);

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
