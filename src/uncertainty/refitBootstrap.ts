/**
 * The bootstrap by full refits: blocks of the recording are drawn with replacement and the estimator is run again on
 * each recording drawn. It takes as many fits as replicates, and leaves nothing to first-order theory: what the one-step
 * bootstrap is checked against. The random smoothing bias of the estimate is added to each.
 *
 * Source  Efron, Bootstrap methods: another look at the jackknife, Ann. Statist. 7 (1979) 1.
 */

import { unlessUnusable } from '../errors.js';
import type { Blocks } from '../estimation/blocks.js';
import { chooseEstimator } from '../estimation/choose.js';
import type { Estimate, EstimationPlan } from '../estimation/Estimate.js';
import { modelParameters } from '../fields/modelParameters.js';
import { type MapTasks, mapTasksSerially, type Task } from '../numerics/MapTasks.js';
import type { ReportShare } from '../numerics/ReportShare.js';
import { type RandomStream, randomStream } from '../numerics/random/RandomStream.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { drawSmoothingBias } from './bootstrap.js';

export interface RefitContext {
  readonly mapTasks?: MapTasks;
  readonly onProgress?: ReportShare;
}

interface SharedWork {
  readonly tracks: TrackSet;
  readonly plan: EstimationPlan;
  readonly estimator: string;
  readonly seed: number;
}

/** Draws a recording and estimates again; null where nothing can be estimated from it. */
export const refitDrawnTask: Task<SharedWork, number, Float64Array | null> = {
  name: 'refit-drawn',
  run({ tracks, plan, estimator, seed }, replicate) {
    const drawn = drawBlocks(tracks, plan.blocks, randomStream(seed, 'refit bootstrap', replicate));
    return unlessUnusable(() => {
      const point = { ...plan, blocks: drawn.blocks, pointOnly: true };
      return modelParameters(chooseEstimator(estimator)(drawn.tracks, point).model);
    });
  },
};

/**
 * Draws coefficient vectors by refitting.
 *
 * @param plan  without `onProgress`, which could not pass between threads
 * @param estimate  of the tracks by the plan and the estimator named
 * @returns at most `replicates` coefficient vectors, in the order of `modelParameters`; fewer where recordings drawn
 *   cannot be fitted
 *
 * Cost  one fit per replicate.
 */
export async function refitReplicates(
  tracks: TrackSet,
  plan: EstimationPlan,
  estimator: string,
  estimate: Estimate,
  replicates: number,
  seed: number,
  { mapTasks = mapTasksSerially, onProgress }: RefitContext = {},
): Promise<Float64Array[]> {
  const shared: SharedWork = { tracks, plan, estimator, seed };
  const inputs = Array.from({ length: replicates }, (_, replicate) => replicate);
  const refits = await mapTasks(refitDrawnTask, shared, inputs, (done, total) => onProgress?.(done / total));
  const centre = modelParameters(estimate.model);
  const { count } = plan.blocks;
  const inflate = Math.sqrt(count / Math.max(1, count - 1)); // resampled means vary by (B − 1)/B too little
  return refits.flatMap((refit, replicate) => {
    if (refit === null) return [];
    const bias = drawSmoothingBias(estimate, randomStream(seed, 'refit bootstrap bias', replicate));
    return [refit.map((value, i) => centre[i] + inflate * (value - centre[i]) + bias[i])];
  });
}

/** As many blocks as there are, drawn with replacement; each run of a block along a track becomes a track of its own. */
function drawBlocks(
  tracks: TrackSet,
  { count, ofPosition, kind }: Blocks,
  stream: RandomStream,
): { tracks: TrackSet; blocks: Blocks } {
  const runs = listRuns(tracks, ofPosition, count);
  const rows: number[] = [];
  const offsets = [0];
  const blockOf: number[] = [];
  for (let draw = 0; draw < count; draw++) {
    const block = stream.integer(count);
    for (const [start, end] of runs[block]) {
      for (let row = start; row < end; row++) {
        rows.push(row);
        blockOf.push(block); // drawn twice, it is still left out as one
      }
      offsets.push(rows.length);
    }
  }
  const { dimensions: d, positions, times, localizationErrors } = tracks;
  const pick = (from: Float64Array): Float64Array =>
    Float64Array.from({ length: rows.length * d }, (_, i) => from[rows[Math.floor(i / d)] * d + (i % d)]);
  return {
    tracks: {
      ...tracks,
      trackNames: offsets.slice(1).map((_, track) => String(track)),
      trackOffsets: Int32Array.from(offsets),
      times: Float64Array.from(rows, (row) => times[row]),
      positions: pick(positions),
      localizationErrors: localizationErrors && pick(localizationErrors),
      concentrations: undefined,
      trackTypes: null,
    },
    blocks: { count, ofPosition: Int32Array.from(blockOf), kind },
  };
}

/** The runs of consecutive positions of one track that make up each block. */
function listRuns(
  { trackOffsets }: TrackSet,
  ofPosition: Int32Array,
  count: number,
): [start: number, end: number][][] {
  const runs: [number, number][][] = Array.from({ length: count }, () => []);
  for (let track = 0; track + 1 < trackOffsets.length; track++) {
    let start = trackOffsets[track];
    for (let row = start + 1; row <= trackOffsets[track + 1]; row++) {
      if (row < trackOffsets[track + 1] && ofPosition[row] === ofPosition[start]) continue;
      runs[ofPosition[start]].push([start, row]);
      start = row;
    }
  }
  return runs;
}
