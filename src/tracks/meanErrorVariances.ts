import { countPositions, type TrackSet } from './TrackSet.js';

/** Mean of the table's own localization error variances along each axis, length²; null where it has none. */
export function meanErrorVariances(tracks: TrackSet): Float64Array | null {
  const { localizationErrors, dimensions } = tracks;
  if (!localizationErrors) return null;
  const sums = new Float64Array(dimensions);
  for (let i = 0; i < localizationErrors.length; i++) sums[i % dimensions] += localizationErrors[i] ** 2;
  return sums.map((sum) => sum / Math.max(countPositions(tracks), 1));
}
