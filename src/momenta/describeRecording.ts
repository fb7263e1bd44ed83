/**
 * What was recorded, counted: track lengths, missing frames, gaps, uneven steps, tracks that never move.
 */

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
  /** Tracks that spread less than a fourteenth as wide as is usual (variance below 1/200 of the median). */
  readonly immobileTracks: number;
}

const IMMOBILE_VARIANCE = 0.005; // free motion of the usual length stays this narrow with negligible probability
const IMMOBILE_POSITIONS = 5;

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
    immobileTracks: countImmobileTracks(tracks),
  };
}

/** Minimum, quartiles and maximum (linear interpolation between order statistics); zeros for no values. */
function findQuantiles(values: Float64Array): Quantiles {
  const sorted = values.slice().sort();
  const at = (share: number): number => {
    if (sorted.length === 0) return 0;
    const place = share * (sorted.length - 1);
    const below = Math.floor(place);
    const above = Math.ceil(place);
    return sorted[below] + (place - below) * (sorted[above] - sorted[below]);
  };
  return { least: at(0), lowerQuartile: at(0.25), median: at(0.5), upperQuartile: at(0.75), most: at(1) };
}

/** Tracks whose positions spread by far less than those of the usual track, or not at all. */
function countImmobileTracks(tracks: TrackSet): number {
  const { dimensions, positions, trackOffsets } = tracks;
  const spreads: number[] = [];
  for (let track = 0; track < countTracks(tracks); track++) {
    const start = trackOffsets[track];
    const count = trackOffsets[track + 1] - start;
    if (count < IMMOBILE_POSITIONS) continue;
    let spread = 0;
    for (let axis = 0; axis < dimensions; axis++) {
      const origin = positions[start * dimensions + axis];
      let sum = 0;
      let squares = 0;
      for (let row = start; row < start + count; row++) {
        const offset = positions[row * dimensions + axis] - origin;
        sum += offset;
        squares += offset * offset;
      }
      spread += Math.max(squares - (sum * sum) / count, 0) / count;
    }
    spreads.push(spread);
  }
  const median = findQuantiles(Float64Array.from(spreads)).median;
  return spreads.filter((spread) => spread <= IMMOBILE_VARIANCE * median).length;
}
