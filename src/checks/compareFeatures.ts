/**
 * The recording among its simulated likes. Under a right model the recording and the R simulated recordings are
 * exchangeable, so every number below treats the R + 1 data sets alike: each is compared with the mean of all others.
 */

import { quantileSorted } from '../numerics/statistics/quantile.js';

export interface BlockRange {
  readonly name: string;
  readonly offset: number;
  readonly length: number;
  /**
   * Where the numbers belong to places: the occupancy of those places, `perPlace` numbers to one. Places count by how
   * much of the time is spent there (averaged over all data sets), because the others hold little but scatter.
   */
  readonly occupancy?: { readonly offset: number; readonly perPlace: number };
}

export interface BlockComparison {
  readonly name: string;
  /** Mean squared deviation of the recording from the others, in variances between data sets; about 1 if alike. */
  readonly recorded: number;
  readonly low: number;
  readonly high: number;
  readonly p: number;
  readonly adjusted: number;
}

export interface Comparison {
  readonly statistics: readonly BlockComparison[];
  /** Simulated p-value of the largest deviation over all statistics. */
  readonly p: number;
}

/**
 * Compares data set 0 (the recording) with the others.
 *
 * Distance of data set i in a block: the (occupancy-weighted) mean over its numbers c of (f_ic − mean of the others)² / variance_c.
 * p-values count the data sets whose distance is at least as large, the recording included: (1 + #)/(R + 1). For all
 * blocks together the logarithms of the distances are standardised by the other data sets and the largest is taken:
 * its p-value needs no assumption on how the statistics hang together.
 *
 * Source  simulated p-values: Davison & Hinkley, Bootstrap Methods and their Application (1997), ch. 4; the joint
 *         correction by the largest statistic: Westfall & Young, Resampling-Based Multiple Testing (1993), ch. 2.
 *
 * @param features  R + 1 arrays of one length, the recording first
 */
export function compareFeatures(
  features: readonly Float64Array[],
  blocks: readonly BlockRange[],
): Comparison {
  const count = features.length;
  const distances = blocks.map((block) => measureDistances(features, block));
  const scores = distances.map(standardizeLogarithms);
  const largest = Array.from({ length: count }, (_, set) => Math.max(...scores.map((row) => row[set])));
  const statistics = blocks.map(({ name }, block): BlockComparison => {
    const own = distances[block];
    const others = Float64Array.from(own.slice(1)).sort();
    return {
      name,
      recorded: own[0],
      low: quantileSorted(others, 0.025),
      high: quantileSorted(others, 0.975),
      p: countAtLeast(own, own[0]) / count,
      adjusted: countAtLeast(largest, scores[block][0], 1) / count,
    };
  });
  return { statistics, p: countAtLeast(largest, largest[0]) / count };
}

/** How many values reach a threshold; value 0 (the recording) always counts itself. */
function countAtLeast(values: ArrayLike<number>, threshold: number, from = 0): number {
  let found = from;
  for (let i = from; i < values.length; i++) if (values[i] >= threshold) found++;
  return found;
}

function measureDistances(features: readonly Float64Array[], block: BlockRange): Float64Array {
  const { offset, length, occupancy } = block;
  const count = features.length;
  const distances = new Float64Array(count);
  const used = new Float64Array(count);
  for (let c = offset; c < offset + length; c++) {
    let sum = 0;
    let known = 0;
    for (let set = 0; set < count; set++) {
      const value = features[set][c];
      if (Number.isNaN(value)) continue;
      sum += value;
      known++;
    }
    if (known < 3) continue;
    const mean = sum / known;
    let variance = 0;
    for (let set = 0; set < count; set++) {
      const value = features[set][c];
      if (!Number.isNaN(value)) variance += (value - mean) ** 2;
    }
    variance /= known - 1;
    if (!(variance > 1e-24 * mean * mean) || variance === 0) continue;
    let weight = 1;
    if (occupancy !== undefined) {
      const place = occupancy.offset + Math.floor((c - offset) / occupancy.perPlace);
      weight = 0;
      for (let set = 0; set < count; set++) weight += features[set][place] / count;
    }
    for (let set = 0; set < count; set++) {
      const value = features[set][c];
      if (Number.isNaN(value)) continue;
      const others = (sum - value) / (known - 1);
      distances[set] += (weight * (value - others) ** 2) / variance;
      used[set] += weight;
    }
  }
  return distances.map((value, set) => (used[set] > 0 ? value / used[set] : 0));
}

/** Logarithms in standard deviations from the mean of the other data sets. */
function standardizeLogarithms(distances: Float64Array): Float64Array {
  const logs = distances.map((value) => Math.log(Math.max(value, 1e-12)));
  const count = logs.length;
  let sum = 0;
  for (let i = 0; i < count; i++) sum += logs[i];
  const centre = sum / count;
  let square = 0;
  for (let i = 0; i < count; i++) square += (logs[i] - centre) ** 2;
  return logs.map((value) => {
    const others = (sum - value) / (count - 1);
    const spread = (square - ((value - centre) ** 2 * count) / (count - 1)) / Math.max(1, count - 2);
    return spread > 0 ? (value - others) / Math.sqrt(spread) : 0;
  });
}
