/**
 * What was recorded, counted: track lengths, missing frames, gaps, uneven steps.
 */

import { quantileSorted } from '../numerics/statistics/quantile.js';
import { INTERVAL_TOLERANCE } from '../tracks/runs.js';
import { countPositions, countTracks, type TrackSet } from '../tracks/TrackSet.js';

export interface Quantiles {
  readonly least: number;
  readonly lowerQuartile: number;
  readonly median: number;
  readonly upperQuartile: number;
  readonly most: number;
}

export interface Recording {
  readonly tracks: number;
  readonly positions: number;
  /** Positions per track. */
  readonly trackLengths: Quantiles;
  /** Time from first to last position of a track. */
  readonly trackDurations: Quantiles;
  /** Time from the first to the last position of all. */
  readonly duration: number;
  /** Steps longer than one interval by a whole number of frames, or nearly so. */
  readonly gaps: number;
  /** Frames missing in those gaps. */
  readonly missingFrames: number;
  /** Frames missing in the longest gap. */
  readonly longestGap: number;
  /** Steps that are no whole number of intervals long (beyond 1 %). */
  readonly unevenSteps: number;
  /** All steps from one position to the next. */
  readonly steps: number;
}

/** Counts over all tracks. */
export function describeRecording(tracks: TrackSet): Recording {
  const { times, trackOffsets, samplingInterval } = tracks;
  const m = countTracks(tracks);
  const lengths = new Float64Array(m);
  const durations = new Float64Array(m);
  let gaps = 0;
  let missingFrames = 0;
  let longestGap = 0;
  let unevenSteps = 0;
  let steps = 0;
  let first = Infinity;
  let last = -Infinity;
  for (let track = 0; track < m; track++) {
    const start = trackOffsets[track];
    const end = trackOffsets[track + 1];
    lengths[track] = end - start;
    if (end === start) continue;
    durations[track] = times[end - 1] - times[start];
    first = Math.min(first, times[start]);
    last = Math.max(last, times[end - 1]);
    for (let row = start + 1; row < end; row++) {
      const frames = (times[row] - times[row - 1]) / samplingInterval;
      const whole = Math.max(1, Math.round(frames));
      steps++;
      if (Math.abs(frames - whole) > INTERVAL_TOLERANCE * whole) unevenSteps++;
      if (whole < 2) continue;
      gaps++;
      missingFrames += whole - 1;
      longestGap = Math.max(longestGap, whole - 1);
    }
  }
  return {
    tracks: m,
    positions: countPositions(tracks),
    trackLengths: findQuantiles(lengths),
    trackDurations: findQuantiles(durations),
    duration: last >= first ? last - first : 0,
    gaps,
    missingFrames,
    longestGap,
    unevenSteps,
    steps,
  };
}

/** Minimum, quartiles and maximum; zeros for no values. */
function findQuantiles(values: Float64Array): Quantiles {
  const sorted = values.slice().sort();
  const at = (share: number): number => (sorted.length > 0 ? quantileSorted(sorted, share) : 0);
  return { least: at(0), lowerQuartile: at(0.25), median: at(0.5), upperQuartile: at(0.75), most: at(1) };
}
