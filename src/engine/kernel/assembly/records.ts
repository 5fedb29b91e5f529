/** One record per step, in doubles: by lane weighted, energy and peak; then left times right, and the true peak. */
import { lanes, stepSamples } from './rows';

let records: usize = 0;
/** Step of the first record, and steps that are whole. */
let firstStep: f64 = 0;
export let whole: i32 = 0;
let slots: i32 = 0;

export function recordDoubles(): i32 {
  return 3 * lanes + 2;
}
function bytes(): usize {
  return <usize>(recordDoubles() * 8);
}

export function configureRecords(capacity: i32): void {
  slots = <i32>Math.ceil(<f64>capacity / stepSamples) + 4;
  records = heap.alloc(<usize>slots * bytes());
}
export function recordsPointer(): usize {
  return records;
}
/** Place of a step that is not delivered yet. */
export function recordOf(step: f64): usize {
  const slot = <i32>(step - firstStep);
  if (slot < 0 || slot >= slots) unreachable();
  return records + <usize>slot * bytes();
}
export function setWeighted(record: usize, lane: i32, weighted: f64, energy: f64): void {
  store<f64>(record + <usize>(lane * 8), weighted);
  store<f64>(record + <usize>((lanes + lane) * 8), energy);
}
export function setPeak(record: usize, lane: i32, peak: f64): void {
  store<f64>(record + <usize>((2 * lanes + lane) * 8), peak);
}
export function setLeftRight(record: usize, mean: f64): void {
  store<f64>(record + <usize>(3 * lanes * 8), mean);
}
export function setTruePeak(record: usize, peak: f64): void {
  store<f64>(record + <usize>((3 * lanes + 1) * 8), peak);
  whole++;
}
/** Forgets the whole records, which have been read. */
export function dropWhole(): void {
  if (whole == 0) return;
  memory.copy(records, records + <usize>whole * bytes(), <usize>(slots - whole) * bytes());
  firstStep += <f64>whole;
  whole = 0;
}
