/**
 * A p-value from recordings simulated under the statement: the share of them, the recording itself counted, whose
 * smallest p-value over the levels of detail is as small. Theory then only orders the recordings; it need not be right.
 *
 * Source  Davison & Hinkley, Bootstrap Methods and their Application (1997), ch. 4.
 */

import { unlessUnusable } from '../errors.js';

/**
 * @param found  smallest p-value of the recording
 * @param simulate  smallest p-value of simulated recording `index`
 */
export function simulateP(
  found: number,
  simulate: (index: number) => number,
  simulations: number,
  onProgress?: (done: number, total: number) => void,
): number {
  let asSmall = 1;
  let usable = 1;
  for (let index = 0; index < simulations; index++) {
    const p = unlessUnusable(() => simulate(index));
    if (p !== null) {
      usable++;
      if (p <= found) asSmall++;
    }
    onProgress?.(index + 1, simulations);
  }
  return asSmall / usable;
}
