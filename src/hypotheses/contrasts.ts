/**
 * Contrasts: averages of a statement's columns against smooth modes, with what each block of data adds to them.
 *
 * Symbols: `K` columns, `I` modes, `E` extras, `B` blocks; Q = E + I K contrasts in the order extras, then mode by mode.
 */

import type { Estimate } from '../estimation/Estimate.js';
import type { Model } from '../fields/CoefficientField.js';
import { withParameters } from '../fields/modelParameters.js';
import type { OccupancyModes } from './occupancyModes.js';
import type { Statement } from './Statement.js';

export interface Contrasts {
  readonly columnCount: number;
  readonly modeCount: number;
  readonly extraCount: number;
  /** Length Q. */
  readonly values: Float64Array;
  /** Shape (B, Q): first-order effect of each block; they sum to about zero. */
  readonly effects: Float64Array;
  /** Shape (Q, Q): covariance of the values, with smoothing bias where the estimate has any. */
  readonly covariance: Float64Array;
  readonly blocks: number;
  /** K columns of the estimate at the nodes. */
  readonly columnsAtNodes: readonly Float64Array[];
}

/**
 * Contrasts of an estimate.
 *
 * The effect of a block follows from its first-order contribution to the parameters, moved through everything between
 * parameters and columns (interval correction, links, ratios). Covariance: B/(B − 1) Σ effect
 * effectᵀ, the sandwich of independent blocks.
 *
 * @param nodes  shape (m, d): places that stand for the occupancy, those of `modes`
 *
 * Cost  B + 2 evaluations of the model at the nodes.
 */
export function measureContrasts(
  estimate: Estimate,
  statement: Statement,
  nodes: Float64Array,
  modes: OccupancyModes,
): Contrasts {
  const { parameters, influences, smoothingFactor } = estimate;
  const p = parameters.length;
  const blocks = influences.length / p;
  const columnCount = statement.columnNames.length;
  const extraCount = statement.extraNames.length;
  const size = extraCount + modes.count * columnCount;
  const measure = (raw: Float64Array): Float64Array => {
    const model = withParameters(estimate.model, estimate.toModelParameters(raw));
    return averageColumns(statement, model, statement.columns(model, nodes), modes);
  };
  const values = measure(parameters);
  const moved = new Float64Array(p);
  const changeAlong = (direction: (i: number) => number): Float64Array => {
    for (let i = 0; i < p; i++) moved[i] = parameters[i] + direction(i);
    return measure(moved).map((value, i) => value - values[i]);
  };
  const effects = new Float64Array(blocks * size);
  for (let block = 0; block < blocks; block++) {
    effects.set(
      changeAlong((i) => influences[block * p + i]),
      block * size,
    );
  }
  const covariance = new Float64Array(size * size);
  addOuterProducts(covariance, effects, size, blocks / Math.max(1, blocks - 1));
  if (smoothingFactor !== null) {
    const { values: factor, columns } = smoothingFactor;
    const bias = new Float64Array(columns * size);
    for (let c = 0; c < columns; c++) {
      bias.set(
        changeAlong((i) => factor[i * columns + c]),
        c * size,
      );
    }
    addOuterProducts(covariance, bias, size, 1);
  }
  return {
    columnCount,
    modeCount: modes.count,
    extraCount,
    values,
    effects,
    covariance,
    blocks,
    columnsAtNodes: statement.columns(
      withParameters(estimate.model, estimate.toModelParameters(parameters)),
      nodes,
    ),
  };
}

function averageColumns(
  statement: Statement,
  model: Model,
  columns: readonly Float64Array[],
  modes: OccupancyModes,
): Float64Array {
  const extras = statement.extras(model);
  const averages = averageOverModes(columns, modes);
  const out = new Float64Array(extras.length + averages.length);
  out.set(extras);
  out.set(averages, extras.length);
  return out;
}

/** Mean of each function times each mode over the nodes, mode by mode. */
export function averageOverModes(functions: readonly Float64Array[], modes: OccupancyModes): Float64Array {
  const out = new Float64Array(modes.count * functions.length);
  for (let mode = 0; mode < modes.count; mode++) {
    const weights = modes.atNodes[mode];
    functions.forEach((values, index) => {
      let sum = 0;
      for (let node = 0; node < weights.length; node++) sum += weights[node] * values[node];
      out[mode * functions.length + index] = sum / weights.length;
    });
  }
  return out;
}

function addOuterProducts(out: Float64Array, rows: Float64Array, size: number, weight: number): void {
  for (let start = 0; start < rows.length; start += size) {
    for (let i = 0; i < size; i++) {
      const value = weight * rows[start + i];
      if (value === 0) continue;
      for (let j = 0; j < size; j++) out[i * size + j] += value * rows[start + j];
    }
  }
}
