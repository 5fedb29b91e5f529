/**
 * Memory: the input's bytes, and one row of samples per lane that slides over the programme. A row keeps `history` samples
 * of the past; loads may reach past its end by `margin`. All places are row coordinates unless called absolute.
 */
export const history: i32 = 64;
export const margin: i32 = 128;

export let lanes: i32 = 0;
/** Lanes that are audio channels of the presentation; the rest is the downmix. */
export let measured: i32 = 0;
export let frameBytes: i32 = 0;
/** Whether float32 does not hold every sample: float64 rows stand beside then. */
export let wide: bool = false;
export let stepSamples: f64 = 0;

let input: usize = 0;
let offsets: usize = 0;
let narrowRows: usize = 0;
let wideRows: usize = 0;
let capacity: i32 = 0;

/** Coordinate behind the last sample, and the absolute place of coordinate 0. */
export let filled: i32 = 0;
export let origin: f64 = 0;

/** `chunk`: most frames that come at once. */
export function allocate(
  rate: f64,
  lanesInAll: i32,
  measuredLanes: i32,
  bytesOfFrame: i32,
  isWide: bool,
  chunk: i32,
): void {
  lanes = lanesInAll;
  measured = measuredLanes;
  frameBytes = bytesOfFrame;
  wide = isWide;
  stepSamples = rate / 100;
  capacity = history + <i32>Math.ceil(stepSamples) + margin + chunk + margin;
  // Filters run over pairs of lanes: an odd one is paired with a row of silence.
  const rows = (lanes + 1) & ~1;
  input = heap.alloc(<usize>((chunk + 4) * frameBytes + 16));
  offsets = heap.alloc(<usize>(lanes * 4));
  narrowRows = heap.alloc(<usize>(rows * capacity * 4));
  memory.fill(narrowRows, 0, <usize>(rows * capacity * 4));
  if (wide) {
    wideRows = heap.alloc(<usize>(rows * capacity * 8));
    memory.fill(wideRows, 0, <usize>(rows * capacity * 8));
  }
  filled = history;
  origin = -(<f64>history);
}

export function inputPointer(): usize {
  return input;
}
/** Takes the next frames from elsewhere in this memory; up to three frames more are read from there. */
export function takeInputFrom(at: usize): void {
  input = at;
}
/** Room that a source may read into, so that its bytes need no copying. */
export function allocateBlock(bytes: i32): usize {
  return heap.alloc(<usize>(bytes + 3 * frameBytes + 16));
}
/** Where in a frame each measured lane lies: 32-bit byte offsets. */
export function offsetsPointer(): usize {
  return offsets;
}
export function row(lane: i32): usize {
  return narrowRows + <usize>(lane * capacity * 4);
}
export function wideRow(lane: i32): usize {
  return wideRows + <usize>(lane * capacity * 8);
}
/** The newest samples of a lane, float32. */
export function newestPointer(lane: i32, frames: i32): usize {
  return row(lane) + <usize>((filled - frames) * 4);
}
export function sampleAt(lane: i32, at: i32): f64 {
  return wide
    ? load<f64>(wideRow(lane) + ((<usize>at) << 3))
    : <f64>load<f32>(row(lane) + ((<usize>at) << 2));
}

export function grow(frames: i32): void {
  filled += frames;
}

/** Makes room by dropping all samples before `from`. */
export function dropBefore(from: i32): void {
  if (from <= 0) return;
  const kept = filled - from;
  for (let lane = 0; lane < lanes; lane++) {
    memory.copy(row(lane), row(lane) + <usize>(from * 4), <usize>(kept * 4));
    if (wide) memory.copy(wideRow(lane), wideRow(lane) + <usize>(from * 8), <usize>(kept * 8));
  }
  filled = kept;
  origin += <f64>from;
}

/** Silence behind the end, for what rings into it. */
export function silenceAhead(): void {
  for (let lane = 0; lane < lanes; lane++) {
    memory.fill(row(lane) + <usize>(filled * 4), 0, <usize>(margin * 4));
    if (wide) memory.fill(wideRow(lane) + <usize>(filled * 8), 0, <usize>(margin * 8));
  }
}

/** First sample of a step, as coordinate. */
export function boundary(step: f64): i32 {
  return <i32>(Math.floor(step * stepSamples + 0.5) - origin);
}
