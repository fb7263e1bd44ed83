/**
 * The bootstrap of an estimate: blocks are drawn with replacement and each replicate's parameters follow from the
 * blocks' first-order contributions, without going over the data again; a random smoothing bias is added, so that
 * intervals built from the replicates cover the coefficient and not its smoothed version.
 *
 * Source  Efron, Bootstrap methods: another look at the jackknife, Ann. Statist. 7 (1979) 1; one-step form: Davison &
 *         Hinkley, Bootstrap Methods and their Application (1997), ch. 2.7; smoothing bias as a random effect: Nychka,
 *         J. Am. Stat. Assoc. 83 (1988) 1134.
 */

import { addMultiple, innerProduct } from '../numerics/linear/denseMatrix.js';
import type { Estimate } from '../estimation/Estimate.js';
import { type RandomStream, randomStream } from '../numerics/random/RandomStream.js';

const BATCH = 16; // replicates whose normals fit a cache together

/**
 * Draws coefficient vectors from the uncertainty of an estimate.
 *
 * @param replicates  how many
 * @param seed  replicate r uses the stream (seed, 'bootstrap', r)
 * @returns one coefficient vector per replicate, in the order of `modelParameters`
 *
 * Cost  O(replicates · (B p + correction)).
 */
export function drawReplicates(estimate: Estimate, replicates: number, seed: number): Float64Array[] {
  const { parameters, influences } = estimate;
  const p = parameters.length;
  const blocks = influences.length / p;
  const inflate = Math.sqrt(blocks / Math.max(1, blocks - 1)); // resampled means vary by (B − 1)/B too little
  const out: Float64Array[] = [];
  while (out.length < replicates) {
    const batch = Array.from({ length: Math.min(BATCH, replicates - out.length) }, (_, i) =>
      randomStream(seed, 'bootstrap', out.length + i),
    );
    const raws = batch.map((stream) => {
      const weights = new Float64Array(blocks).fill(-1);
      for (let draw = 0; draw < blocks; draw++) weights[stream.integer(blocks)]++;
      const raw = parameters.slice();
      for (let block = 0; block < blocks; block++)
        addMultiple(raw, 0, inflate * weights[block], influences, block * p, p);
      return raw;
    });
    addSmoothingBias(estimate, batch, raws);
    for (const raw of raws) out.push(estimate.toModelParameters(raw));
  }
  return out;
}

/** What a draw of the smoothing bias adds to the coefficients, in the order of `modelParameters`. */
export function drawSmoothingBias(estimate: Estimate, stream: RandomStream): Float64Array {
  const raw = estimate.parameters.slice();
  addSmoothingBias(estimate, [stream], [raw]);
  const centre = estimate.toModelParameters(estimate.parameters);
  return estimate.toModelParameters(raw).map((value, i) => value - centre[i]);
}

/** To several replicates at once: the factor is large, and read from memory once for all of them. */
function addSmoothingBias(
  { smoothingFactor }: Estimate,
  streams: readonly RandomStream[],
  raws: readonly Float64Array[],
): void {
  if (!smoothingFactor) return;
  const { values, columns } = smoothingFactor;
  const normals = streams.map((stream) => Float64Array.from({ length: columns }, () => stream.normal()));
  for (let i = 0; i < raws[0].length; i++) {
    for (let r = 0; r < raws.length; r++)
      raws[r][i] += innerProduct(values, i * columns, normals[r], 0, columns);
  }
}
