/**
 * Contrasts less what they are off by in recordings simulated under the statement. Coefficients that change within a few
 * frames leave estimates with a bias of a percent or two, which the intervals of a large recording do not hide; a
 * recording simulated under the statement, estimated the same way, has it too.
 *
 * The mean over N simulations is itself uncertain, by 1/N of the covariance, which is added.
 *
 * Source  indirect inference: Gouriéroux, Monfort & Renault, J. Appl. Econometrics 8 (1993) S85.
 */

import { unlessUnusable } from '../errors.js';
import type { Model } from '../fields/CoefficientField.js';
import { averageOverModes, type Contrasts } from './contrasts.js';
import type { StatementProblem } from './fitStatement.js';

/**
 * @param imposed  the model with the statement made true
 * @param estimate  the model estimated from simulated recording `index`
 * @returns null where no simulated recording can be estimated
 */
export function correctBias(
  { statement, contrasts, nodes, modes }: StatementProblem,
  imposed: Model,
  estimate: (index: number) => Model,
  simulations: number,
  onProgress?: (done: number, total: number) => void,
): Contrasts | null {
  const read = (model: Model): Float64Array =>
    Float64Array.from([
      ...statement.extras(model),
      ...averageOverModes(statement.columns(model, nodes), modes),
    ]);
  const truth = read(imposed);
  const bias = new Float64Array(truth.length);
  let usable = 0;
  for (let index = 0; index < simulations; index++) {
    const found = unlessUnusable(() => read(estimate(index)));
    onProgress?.(index + 1, simulations);
    if (found === null || !found.every(Number.isFinite)) continue;
    usable++;
    for (let i = 0; i < bias.length; i++) bias[i] += found[i] - truth[i];
  }
  if (usable === 0) return null;
  return {
    ...contrasts,
    values: contrasts.values.map((value, i) => value - bias[i] / usable),
    covariance: contrasts.covariance.map((value) => value * (1 + 1 / usable)),
  };
}
