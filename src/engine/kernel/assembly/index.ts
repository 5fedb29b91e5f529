/**
 * The kernel: interleaved frames in; per step of 10 ms energies, peaks and runs out. Lanes are the audio channels that are
 * measured, then the two of a downmix. What the figures are is said by the scalar twin; here it is done fast, and every
 * shortcut is exact.
 */
import { convert } from './convert';
import { mix } from './mix';
import { dropWhole, recordOf, setPeak, setTruePeak } from './records';
import { boundary, dropBefore, filled, grow, history, lanes, measured, silenceAhead, wide } from './rows';
import { closeRuns, dropEvents, follow, widePeakOf } from './runs';
import { beginStep, peaksOf, quiet, stepPeakOver, survey } from './true-peak';
import { weigh } from './weighing';

export { allocate, allocateBlock, inputPointer, newestPointer, offsetsPointer, takeInputFrom } from './rows';
export { configureSamples, convert, usedBits, wildCount, wildFirst } from './convert';
export { factorsPointer } from './mix';
export { configureRecords, recordDoubles, recordsPointer, whole } from './records';
export { configureRuns, eventCount, eventsPointer, lanePeak } from './runs';
export { configurePeaks, laneTruePeak, laneTruePeakAt, prepareQuarters, weightsPointer } from './true-peak';
export { configureWeighting, laneSum } from './weighing';

let half: i32 = 0;
/** Steps whose peaks are known. */
let peakedSteps: f64 = 0;
/** True peak of a last step that is not full; -1: there is none. */
export let tailPeak: f64 = -1;

export function begin(taps: i32): void {
  half = taps >> 1;
}

/** Takes the first `frames` frames of the input. */
export function advance(frames: i32): void {
  dropWhole();
  dropEvents();
  dropBefore(boundary(peakedSteps) - history);
  convert(frames);
  mix(frames);
  weigh(frames);
  grow(frames);
  while (boundary(peakedSteps + 1) + half <= filled) endStep(boundary(peakedSteps + 1), false);
}

/** Ends the programme: what rings behind its end counts for its last step. */
export function finish(): void {
  dropWhole();
  dropEvents();
  silenceAhead();
  while (boundary(peakedSteps + 1) <= filled) {
    const end = boundary(peakedSteps + 1);
    endStep(end, end == filled);
  }
  const from = boundary(peakedSteps);
  if (from < filled) {
    const peak = peaksUpTo(from, filled, true, 0);
    tailPeak = <f64>stepPeakOver(<f32>peak);
  }
  closeRuns(filled);
}

function endStep(to: i32, last: bool): void {
  const record = recordOf(peakedSteps);
  const peak = peaksUpTo(boundary(peakedSteps), to, last, record);
  setTruePeak(record, <f64>stepPeakOver(<f32>peak));
  peakedSteps += 1;
}

/** Peaks and runs of a step, which go on record where there is one; gives the largest sample of the measured lanes. */
function peaksUpTo(from: i32, to: i32, last: bool, record: usize): f64 {
  // What rings before the programme's begin counts for its first step, what rings behind its end for its last.
  const lead = peakedSteps == 0 ? half : 0;
  const trail = last ? half : 0;
  let largest: f64 = 0;
  beginStep();
  for (let lane = 0; lane < lanes; lane++) {
    const narrow = survey(lane, from, to, lead, trail);
    const peak = wide ? widePeakOf(lane, from, to) : <f64>narrow;
    if (lane < measured) largest = max(largest, peak);
    if (record != 0) setPeak(record, lane, peak);
    follow(lane, from, to, peak, quiet);
    peaksOf(lane, from, to + trail, narrow, lane < measured);
  }
  return largest;
}
