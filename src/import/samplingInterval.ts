/** The time between neighbouring frames, told from the steps of all tracks. */

import { INTERVAL_TOLERANCE } from '../tracks/runs.js';

export interface IntervalEstimate {
  /** The dominant step; where no step dominates, the median. Unit of the times. */
  readonly samplingInterval: number;
  /** Fraction of the steps that are the interval or a whole number of intervals long, within INTERVAL_TOLERANCE. */
  readonly regularFraction: number;
}

const MOST_STEPS = 200_000; // steps looked at; more would not change a dominant step, and sorting them costs
const DOMINANT_FRACTION = 0.25; // a step shared by fewer than this is a coincidence of uneven times
/** Smallest step that counts as one, as a fraction of the typical step: below it times differ by rounding only. */
export const SAME_TIME = 1e-6;

/**
 * The step most tracks make from one position to the next: the fullest window of width twice INTERVAL_TOLERANCE in
 * the sorted steps, so that missing frames (steps two, three, … intervals long) and rounding noise do not move it.
 *
 * @param times  length n, sorted within each track
 * @param trackOffsets  length m + 1
 * @returns null where no track has two different times
 */
export function estimateSamplingInterval(
  times: Float64Array,
  trackOffsets: Int32Array,
): IntervalEstimate | null {
  const steps = collectSteps(times, trackOffsets);
  if (steps.length === 0) return null;
  let largest = 0; // largest |time|: sets the rounding noise of a step
  for (let row = 0; row < times.length; row++) largest = Math.max(largest, Math.abs(times[row]));

  let bestStart = 0;
  let bestCount = 0;
  let end = 0;
  for (let start = 0; start < steps.length; start++) {
    const limit = steps[start] * (1 + 2 * INTERVAL_TOLERANCE);
    while (end < steps.length && steps[end] <= limit) end++;
    if (end - start > bestCount) [bestStart, bestCount] = [start, end - start];
  }
  const dominant = bestCount > 1 && bestCount >= DOMINANT_FRACTION * steps.length;
  const middle = dominant ? bestStart + ((bestCount - 1) >> 1) : (steps.length - 1) >> 1;
  const samplingInterval = roundWithin(steps[middle], 4 * Number.EPSILON * largest);

  let regular = 0;
  for (let i = 0; i < steps.length; i++) {
    const intervals = Math.max(1, Math.round(steps[i] / samplingInterval));
    if (Math.abs(steps[i] - intervals * samplingInterval) <= INTERVAL_TOLERANCE * samplingInterval) regular++;
  }
  return { samplingInterval, regularFraction: regular / steps.length };
}

/** Sorted steps between different times; of very many an evenly spread part. */
function collectSteps(times: Float64Array, trackOffsets: Int32Array): Float64Array {
  const stride = Math.max(1, Math.ceil(times.length / MOST_STEPS));
  const steps = new Float64Array(Math.floor(times.length / stride) + 1);
  let count = 0;
  let counter = 0;
  for (let track = 0; track + 1 < trackOffsets.length; track++) {
    for (let row = trackOffsets[track] + 1; row < trackOffsets[track + 1]; row++) {
      const step = times[row] - times[row - 1];
      if (step > 0 && counter++ % stride === 0) steps[count++] = step;
    }
  }
  const sorted = steps.subarray(0, count).sort();
  // Times that differ by rounding only would fill windows of their own.
  const floor = SAME_TIME * (sorted[sorted.length >> 1] ?? 0);
  let first = 0;
  while (first < sorted.length && sorted[first] <= floor) first++;
  return sorted.subarray(first);
}

/** The shortest decimal number within the rounding noise of a value: 0.1 instead of 0.09999999999999998. */
function roundWithin(value: number, noise: number): number {
  for (let digits = 1; digits < 17; digits++) {
    const rounded = Number(value.toPrecision(digits));
    if (Math.abs(rounded - value) <= noise) return rounded;
  }
  return value;
}
