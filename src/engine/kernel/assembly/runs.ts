/** Runs of zeros, of samples at full scale, and of equal samples at a lane's own peak; told as they end. */
import { lanes, measured, origin, sampleAt, wideRow } from './rows';

const zeros: f64 = 0;
const full: f64 = 1;
const flat: f64 = 2;

/** Per event in doubles: kind, lane, start, length, value. */
const eventDoubles: i32 = 5;
let events: usize = 0;
export let eventCount: i32 = 0;

/** Per lane: open runs of zeros, of full scale, of equal samples, and the value of the last. */
let state: usize = 0;
let peaks: usize = 0;
let fullScale: f64 = 1;
let zeroRun: i32 = 0;
let fullRun: i32 = 0;
let flatRun: i32 = 0;

export function configureRuns(
  scale: f64,
  leastZeros: i32,
  leastFull: i32,
  leastFlat: i32,
  capacity: i32,
): void {
  fullScale = scale;
  zeroRun = leastZeros;
  fullRun = leastFull;
  flatRun = leastFlat;
  // Of each kind a run needs its own samples: fewer than half of them can be ends.
  events = heap.alloc(<usize>(((capacity >> 1) + 8) * measured * eventDoubles * 8));
  state = heap.alloc(<usize>(lanes * 32));
  memory.fill(state, 0, <usize>(lanes * 32));
  for (let lane = 0; lane < lanes; lane++) store<f64>(state + <usize>(lane * 32 + 24), NaN);
  peaks = heap.alloc(<usize>(lanes * 8));
  memory.fill(peaks, 0, <usize>(lanes * 8));
}
export function eventsPointer(): usize {
  return events;
}
export function dropEvents(): void {
  eventCount = 0;
}
/** Sample peak of a lane so far. */
export function lanePeak(lane: i32): f64 {
  return load<f64>(peaks + <usize>(lane * 8));
}

/** Sample peak of a stretch of float64 samples. */
export function widePeakOf(lane: i32, from: i32, to: i32): f64 {
  const start = wideRow(lane);
  let i = from;
  let most = f64x2.splat(0);
  for (; i + 2 <= to; i += 2) most = f64x2.pmax(most, f64x2.abs(v128.load(start + ((<usize>i) << 3))));
  let peak = max(f64x2.extract_lane(most, 0), f64x2.extract_lane(most, 1));
  for (; i < to; i++) peak = max(peak, Math.abs(sampleAt(lane, i)));
  return peak;
}

/** Follows the runs of a step; `quiet`: it may hold a long run of zeros. */
export function follow(lane: i32, from: i32, to: i32, peak: f64, quiet: bool): void {
  const largest = peaks + <usize>(lane * 8);
  if (peak > load<f64>(largest)) store<f64>(largest, peak);
  if (lane >= measured) return;
  const mine = state + <usize>(lane * 32);
  if (quiet || load<i32>(mine) > 0) followZeros(mine, lane, from, to);
  if (peak > 0 && (peak >= fullScale || peak >= load<f64>(largest))) followTops(mine, lane, from, to);
  else closeTops(mine, lane, from);
}

/** Ends what is open at the end of the programme. */
export function closeRuns(at: i32): void {
  for (let lane = 0; lane < measured; lane++) {
    const mine = state + <usize>(lane * 32);
    closeTops(mine, lane, at);
    endZeros(mine, lane, at);
  }
}

function tell(kind: f64, lane: i32, at: i32, length: i32, value: f64): void {
  const event = events + <usize>(eventCount++ * eventDoubles * 8);
  store<f64>(event, kind);
  store<f64>(event, <f64>lane, 8);
  store<f64>(event, origin + <f64>at - <f64>length, 16);
  store<f64>(event, <f64>length, 24);
  store<f64>(event, value, 32);
}

function followZeros(mine: usize, lane: i32, from: i32, to: i32): void {
  let length = load<i32>(mine);
  if (length == 0)
    while (length < 16 && from - length - 1 >= -(<i32>origin) && sampleAt(lane, from - length - 1) == 0)
      length++;
  for (let i = from; i < to; i++) {
    if (sampleAt(lane, i) == 0) length++;
    else if (length > 0) {
      if (length >= zeroRun) tell(zeros, lane, i, length, 0);
      length = 0;
    }
  }
  store<i32>(mine, length);
}
function endZeros(mine: usize, lane: i32, at: i32): void {
  const length = load<i32>(mine);
  if (length >= zeroRun) tell(zeros, lane, at, length, 0);
}

function followTops(mine: usize, lane: i32, from: i32, to: i32): void {
  const peak = lanePeak(lane);
  let tops = load<i32>(mine, 4);
  let equals = load<i32>(mine, 8);
  let last = load<f64>(mine, 24);
  for (let i = from; i < to; i++) {
    const x = sampleAt(lane, i);
    if (x != last) {
      if (equals >= flatRun && Math.abs(last) >= peak) tell(flat, lane, i, equals, Math.abs(last));
      equals = 0;
      last = x;
    }
    equals++;
    if (Math.abs(x) >= fullScale) tops++;
    else if (tops > 0) {
      if (tops >= fullRun) tell(full, lane, i, tops, 1);
      tops = 0;
    }
  }
  store<i32>(mine, tops, 4);
  store<i32>(mine, equals, 8);
  store<f64>(mine, last, 24);
}

function closeTops(mine: usize, lane: i32, at: i32): void {
  const tops = load<i32>(mine, 4);
  const equals = load<i32>(mine, 8);
  const last = Math.abs(load<f64>(mine, 24));
  if (tops >= fullRun) tell(full, lane, at, tops, 1);
  if (equals >= flatRun && last >= lanePeak(lane)) tell(flat, lane, at, equals, last);
  store<i32>(mine, 0, 4);
  store<i32>(mine, 0, 8);
  store<f64>(mine, NaN, 24);
}
