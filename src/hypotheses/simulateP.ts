/**
 * A p-value from recordings simulated under the statement: the share of them, the recording itself counted, whose own
 * p-value by theory is as small. Theory then only orders the recordings; it need not be right.
 *
 * Source  Davison & Hinkley, Bootstrap Methods and their Application (1997), ch. 4.
 */

import { DataError, NumericalError } from '../errors.js';

const SIMULATIONS = 99; // p-values in steps of 0.01

/**
 * @param found  p-value by theory of the recording
 * @param simulate  p-value by theory of simulated recording `index`
 */
export function simulateP(
  found: number,
  simulate: (index: number) => number,
  onProgress?: (done: number, total: number) => void,
): number {
  let asSmall = 1;
  let usable = 1;
  for (let index = 0; index < SIMULATIONS; index++) {
    try {
      if (simulate(index) <= found) asSmall++;
      usable++;
    } catch (error) {
      // A simulated recording that no estimate can be made from says nothing.
      if (!(error instanceof DataError || error instanceof NumericalError)) throw error;
    }
    onProgress?.(index + 1, SIMULATIONS);
  }
  return asSmall / usable;
}
