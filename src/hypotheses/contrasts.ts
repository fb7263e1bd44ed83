/**
 * Contrasts: averages of a statement's columns against smooth modes, with what each block of data adds to them.
 *
 * Symbols: `K` columns, `I` modes, `E` extras, `B` blocks; Q = E + I K contrasts in the order extras, then mode by mode.
 * Numbers that are only reported are carried along behind them.
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
  /** Numbers only reported, with their standard errors. */
  readonly reports: readonly {
    readonly name: string;
    readonly value: number;
    readonly standardError: number;
  }[];
  /** K columns of the estimate at the nodes. */
  readonly columnsAtNodes: readonly Float64Array[];
}

/**
 * Contrasts of an estimate.
 *
 * The effect of a block follows from its first-order contribution to the parameters, carried through everything between
 * parameters and columns (interval correction, links, ratios) by derivatives. Covariance: B/(B − 1) Σ effect
 * effectᵀ, the sandwich of independent blocks.
 *
 * @param nodes  shape (m, d): places that stand for the occupancy, those of `modes`
 *
 * Cost  twice as many evaluations of the model at the nodes as there are parameters, or blocks where those are fewer.
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
  const reportCount = statement.reportNames.length;
  const width = size + reportCount;
  const modelOf = (raw: Float64Array): Model =>
    withParameters(estimate.model, estimate.toModelParameters(raw));
  const measure = (raw: Float64Array): Float64Array => {
    const model = modelOf(raw);
    const averages = averageOverModes(statement.columns(model, nodes), modes);
    return Float64Array.from([...statement.extras(model), ...averages, ...statement.reports(model)]);
  };
  const values = measure(parameters);
  const factor = smoothingFactor === null ? new Float64Array(0) : transpose(smoothingFactor.values, p);
  // Fewer directions than parameters: follow them; otherwise work out every derivative once.
  const carry =
    (influences.length + factor.length) / p < p
      ? carryRows(measure, parameters, width)
      : carryByDerivatives(measure, parameters, influences, width);
  const effects = carry(influences);
  const whole = new Float64Array(width * width);
  addOuterProducts(whole, effects, width, blocks / Math.max(1, blocks - 1));
  addOuterProducts(whole, carry(factor), width, 1);
  const covariance = new Float64Array(size * size);
  for (let i = 0; i < size; i++) covariance.set(whole.subarray(i * width, i * width + size), i * size);
  return {
    columnCount,
    modeCount: modes.count,
    extraCount,
    values: values.slice(0, size),
    effects: keepColumns(effects, width, size),
    covariance,
    blocks,
    reports: statement.reportNames.map((name, i) => ({
      name,
      value: values[size + i],
      standardError: Math.sqrt(whole[(size + i) * (width + 1)]),
    })),
    columnsAtNodes: statement.columns(modelOf(parameters), nodes),
  };
}

const STEP = 0.3; // standard errors of a parameter over which derivatives are taken: short against curvature

type Measure = (raw: Float64Array) => Float64Array;

/** Carries changes of the parameters, shape (count, p), to changes of the contrasts, shape (count, width). */
type Carry = (rows: Float64Array) => Float64Array;

/** Row by row, by central differences over the whole of it. */
function carryRows(measure: Measure, parameters: Float64Array, width: number): Carry {
  const p = parameters.length;
  return (rows) => {
    const out = new Float64Array((rows.length / p) * width);
    for (let row = 0; row < rows.length / p; row++) {
      const above = measure(parameters.map((value, i) => value + rows[row * p + i]));
      const below = measure(parameters.map((value, i) => value - rows[row * p + i]));
      for (let j = 0; j < width; j++) out[row * width + j] = (above[j] - below[j]) / 2;
    }
    return out;
  };
}

/** By the derivatives of the contrasts by every parameter, from central differences. */
function carryByDerivatives(
  measure: Measure,
  parameters: Float64Array,
  influences: Float64Array,
  width: number,
): Carry {
  const p = parameters.length;
  const slopes = new Float64Array(p * width);
  const moved = parameters.slice();
  for (let i = 0; i < p; i++) {
    let square = 0;
    for (let at = i; at < influences.length; at += p) square += influences[at] ** 2;
    const step = STEP * Math.sqrt(square);
    if (step === 0) continue;
    moved[i] = parameters[i] + step;
    const above = measure(moved);
    moved[i] = parameters[i] - step;
    const below = measure(moved);
    moved[i] = parameters[i];
    for (let j = 0; j < width; j++) slopes[i * width + j] = (above[j] - below[j]) / (2 * step);
  }
  return (rows) => multiplyRows(rows, slopes, p, width);
}

/** From shape (p, columns) to shape (columns, p). */
function transpose(values: Float64Array, p: number): Float64Array {
  const columns = values.length / p;
  return Float64Array.from(values, (_, at) => values[(at % p) * columns + Math.floor(at / p)]);
}

/** Rows of shape (count, p) times a matrix of shape (p, width). */
function multiplyRows(rows: Float64Array, matrix: Float64Array, p: number, width: number): Float64Array {
  const count = rows.length / p;
  const out = new Float64Array(count * width);
  for (let row = 0; row < count; row++) {
    for (let i = 0; i < p; i++) {
      const value = rows[row * p + i];
      if (value === 0) continue;
      for (let j = 0; j < width; j++) out[row * width + j] += value * matrix[i * width + j];
    }
  }
  return out;
}

function keepColumns(rows: Float64Array, width: number, kept: number): Float64Array {
  const out = new Float64Array((rows.length / width) * kept);
  for (let row = 0; row < rows.length / width; row++)
    out.set(rows.subarray(row * width, row * width + kept), row * kept);
  return out;
}

/** Mean of each function times each mode over the nodes, mode by mode, for the first `count` modes. */
export function averageOverModes(
  functions: readonly Float64Array[],
  modes: OccupancyModes,
  count = modes.count,
): Float64Array {
  const out = new Float64Array(count * functions.length);
  for (let mode = 0; mode < count; mode++) {
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
