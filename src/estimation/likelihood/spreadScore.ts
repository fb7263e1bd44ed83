import type { CoefficientReader } from './readCoefficients.js';

/** Chains the scores of a node to the few basis functions that are not zero there; adds them to those of a block. */
export function spreadScores(
  { readers }: CoefficientReader,
  node: number,
  scores: Float64Array,
  block: number,
): void {
  for (let i = 0; i < readers.length; i++) {
    readers[i].recall(node);
    readers[i].spread(scores, block);
  }
}
