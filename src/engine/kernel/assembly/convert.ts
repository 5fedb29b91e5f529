/** Interleaved samples of any form to rows. */
import {
  filled,
  frameBytes,
  inputPointer,
  measured,
  offsetsPointer,
  origin,
  row,
  wide,
  wideRow,
} from './rows';

/** As in core.ts. */
const loudestSample: f64 = 1e9;

export const integers: i32 = 0;
export const floats: i32 = 1;
export const doubles: i32 = 2;

let form: i32 = 0;
/** Puts the bytes of a sample, of either order, left-justified into a little-endian lane. */
let pattern: v128 = i64x2.splat(0);
let pairPattern: v128 = i64x2.splat(0);
let sampleBytes: i32 = 0;
let flip: v128 = i64x2.splat(0);

export let usedBits: i32 = 0;
export let wildCount: f64 = 0;
export let wildFirst: f64 = 0;

export function configureSamples(theForm: i32, bytes: i32, littleEndian: bool, unsigned: bool): void {
  form = theForm;
  tight = frameBytes + 2 * bytes <= 16;
  const width = form == doubles ? 8 : 4;
  const scratch = heap.alloc(32);
  for (let i = 0; i < 16; i++) {
    const place = i % width; // 0: lowest byte of the lane
    const fromTop = width - 1 - place;
    // Out of range gives 0: the bytes below a short sample.
    const source = fromTop >= bytes ? 128 : i - place + (littleEndian ? bytes - 1 - fromTop : fromTop);
    store<u8>(scratch + i, <u8>source);
    // The same where the lanes are two samples of one frame, then two of the next.
    const lane = i >> 2;
    const begin = (lane >> 1) * (tight ? frameBytes : 8) + (lane & 1) * bytes;
    store<u8>(scratch + i, <u8>(source == 128 ? 128 : source - (i - place) + begin), 16);
  }
  pattern = v128.load(scratch);
  pairPattern = v128.load(scratch, 16);
  sampleBytes = bytes;
  flip = i32x4.splat(unsigned ? 0x80000000 : 0);
}

function gather(at: usize, stride: usize): v128 {
  let v = v128.load32_zero(at);
  v = v128.load32_lane(at + stride, v, 1);
  v = v128.load32_lane(at + 2 * stride, v, 2);
  return v128.load32_lane(at + 3 * stride, v, 3);
}

/** The first `frames` frames of the input, behind the rows' last samples. The input is followed by three frames of silence. */
export function convert(frames: i32): void {
  for (let lane = 0; lane < measured; lane++) {
    if (areNeighbours(lane)) {
      convertNeighbours(lane, frames);
      lane++;
      continue;
    }
    const from = inputPointer() + <usize>load<i32>(offsetsPointer() + <usize>(lane * 4));
    if (form == integers) {
      if (wide) convertWideIntegers(lane, from, frames);
      else convertIntegers(lane, from, frames);
    } else if (form == floats) convertFloats(lane, from, frames);
    else convertDoubles(lane, from, frames);
  }
}

/** Whether the next lane's samples lie behind this one's in each frame, in a form whose pairs are read at once. */
function areNeighbours(lane: i32): bool {
  if (form != integers || wide || lane + 1 >= measured) return false;
  const offset = offsetsPointer() + <usize>(lane * 4);
  return load<i32>(offset, 4) - load<i32>(offset) == sampleBytes;
}

/** Whether two frames' pairs lie within 16 bytes; else each is loaded into a half. */
let tight: bool = false;
function twoFrames(from: usize, stride: usize): v128 {
  return tight ? v128.load(from) : v128.load64_lane(from + stride, v128.load64_zero(from), 1);
}

/** Two samples of each of two frames at once. */
function convertNeighbours(lane: i32, frames: i32): void {
  const stride = <usize>frameBytes;
  const shape = pairPattern;
  const sign = flip;
  const scale = f32x4.splat(unit);
  let bits = i64x2.splat(0);
  let from = inputPointer() + <usize>load<i32>(offsetsPointer() + <usize>(lane * 4));
  let to = row(lane) + <usize>(filled * 4);
  const apart = row(lane + 1) - row(lane);
  const end = to + <usize>(frames * 4);
  for (; to < end; to += 16) {
    const a = v128.xor(i8x16.swizzle(twoFrames(from, stride), shape), sign);
    const b = v128.xor(i8x16.swizzle(twoFrames(from + 2 * stride, stride), shape), sign);
    from += 4 * stride;
    bits = v128.or(bits, v128.or(a, b));
    const x = f32x4.mul(f32x4.convert_i32x4_s(a), scale);
    const y = f32x4.mul(f32x4.convert_i32x4_s(b), scale);
    v128.store(to, v128.shuffle<i32>(x, y, 0, 2, 4, 6));
    v128.store(to + apart, v128.shuffle<i32>(x, y, 1, 3, 5, 7));
  }
  noteBits(bits);
}

const unit: f32 = 1 / 2147483648;

function convertIntegers(lane: i32, from: usize, frames: i32): void {
  const stride = <usize>frameBytes;
  const shape = pattern;
  const sign = flip;
  const scale = f32x4.splat(unit);
  let bits = i64x2.splat(0);
  let to = row(lane) + <usize>(filled * 4);
  const end = to + <usize>(frames * 4);
  for (; to < end; to += 16) {
    const v = v128.xor(i8x16.swizzle(gather(from, stride), shape), sign);
    bits = v128.or(bits, v);
    v128.store(to, f32x4.mul(f32x4.convert_i32x4_s(v), scale));
    from += 4 * stride;
  }
  noteBits(bits);
}

function convertWideIntegers(lane: i32, from: usize, frames: i32): void {
  const stride = <usize>frameBytes;
  const shape = pattern;
  const scale = f64x2.splat(1 / 2147483648.0);
  let bits = i64x2.splat(0);
  let to = row(lane) + <usize>(filled * 4);
  let wideTo = wideRow(lane) + <usize>(filled * 8);
  const end = to + <usize>(frames * 4);
  for (; to < end; to += 16) {
    const v = i8x16.swizzle(gather(from, stride), shape);
    bits = v128.or(bits, v);
    const low = f64x2.mul(f64x2.convert_low_i32x4_s(v), scale);
    const high = f64x2.mul(f64x2.convert_low_i32x4_s(v128.shuffle<i32>(v, v, 2, 3, 2, 3)), scale);
    v128.store(wideTo, low);
    v128.store(wideTo, high, 16);
    v128.store(to, v128.shuffle<i64>(f32x4.demote_f64x2_zero(low), f32x4.demote_f64x2_zero(high), 0, 2));
    wideTo += 32;
    from += 4 * stride;
  }
  noteBits(bits);
}

function noteBits(bits: v128): void {
  usedBits |=
    i32x4.extract_lane(bits, 0) |
    i32x4.extract_lane(bits, 1) |
    i32x4.extract_lane(bits, 2) |
    i32x4.extract_lane(bits, 3);
}

function convertFloats(lane: i32, from: usize, frames: i32): void {
  const stride = <usize>frameBytes;
  const shape = pattern;
  const loudest = f32x4.splat(<f32>loudestSample);
  const start = row(lane) + <usize>(filled * 4);
  for (let done = 0; done < frames; done += 4) {
    let v = i8x16.swizzle(gather(from, stride), shape);
    const tame = f32x4.le(f32x4.abs(v), loudest);
    if (!i32x4.all_true(tame)) {
      for (let k = 0; k < 4; k++) {
        const word = load<u32>(markWild(tame) + <usize>(k * 4));
        if (word == 0) noteWild(done + k);
      }
      v = v128.and(v, tame);
    }
    v128.store(start + <usize>(done * 4), v);
    from += 4 * stride;
  }
}

function convertDoubles(lane: i32, from: usize, frames: i32): void {
  const stride = <usize>frameBytes;
  const shape = pattern;
  const loudest = f64x2.splat(loudestSample);
  const start = row(lane) + <usize>(filled * 4);
  const wideStart = wideRow(lane) + <usize>(filled * 8);
  for (let done = 0; done < frames; done += 2) {
    let v = i8x16.swizzle(v128.load64_lane(from + stride, v128.load64_zero(from), 1), shape);
    const tame = f64x2.le(f64x2.abs(v), loudest);
    if (!i64x2.all_true(tame)) {
      for (let k = 0; k < 2; k++) if (load<u64>(markWild(tame) + <usize>(k * 8)) == 0) noteWild(done + k);
      v = v128.and(v, tame);
    }
    v128.store(wideStart + <usize>(done * 8), v);
    v128.store64_lane(start + <usize>(done * 4), f32x4.demote_f64x2_zero(v), 0);
    from += 2 * stride;
  }
}

const mark = memory.data(16, 16);
function markWild(tame: v128): usize {
  v128.store(mark, tame);
  return mark;
}
function noteWild(frame: i32): void {
  const at = origin + <f64>(filled + frame);
  if (wildCount == 0 || at < wildFirst) wildFirst = at;
  wildCount += 1;
}
