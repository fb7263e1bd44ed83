/**
 * The parameters of a statement that bring it closest to the contrasts, and how far it then still is.
 *
 * Distance T²(φ) = hᵀ C⁻¹ h with h_i = M(φ) c_i − ⟨mode i, g(φ)⟩ and C the covariance of M(φ) c: generalised least
 * squares where M is fixed, a ratio's own distance (Fieller's) where it holds a parameter.
 *
 * Source  minimum distance: Ferguson, A method of generating best asymptotically normal estimates, Ann. Math. Statist.
 *         29 (1958) 1046; continuously updated weights: Hansen, Heaton & Yaron, J. Bus. Econ. Stat. 14 (1996) 262;
 *         ratios: Fieller, Some problems in interval estimation, J. R. Stat. Soc. B 16 (1954) 175.
 */

import {
  factorCholeskyInto,
  solveLowerInPlace,
  solveUpperInPlace,
} from '../numerics/linear/choleskyFactor.js';
import { minimizeSquares, type ResidualsInto } from '../numerics/optimize/minimizeSquares.js';
import { averageOverModes, type Contrasts } from './contrasts.js';
import type { OccupancyModes } from './occupancyModes.js';
import type { Statement } from './Statement.js';

/** A statement against the contrasts of the first modes. */
export interface StatementProblem {
  readonly statement: Statement;
  readonly contrasts: Contrasts;
  readonly nodes: Float64Array;
  readonly modes: OccupancyModes;
  /** How many modes are looked at. */
  readonly modeCount: number;
}

export interface StatementFit {
  readonly parameters: Float64Array;
  /** T² at the minimum; infinite where the statement cannot be evaluated anywhere. */
  readonly statistic: number;
  /** How many numbers should vanish, less the parameters. */
  readonly freedom: number;
  /** Shape (r, r): inverse information of the parameters by linearisation; NaN where they cannot be told apart. */
  readonly covariance: Float64Array;
  /** Shape (count, r): derivatives of the whitened residuals C^(−1/2) h at the minimum; zero for a fixed parameter. */
  readonly jacobian: Float64Array;
  readonly converged: boolean;
}

const POLISHED_STARTS = 8; // searches carried to the end, from the best of all starting points

/** Numbers a problem compares: extras and one per residual function and mode. */
export function countComparisons(problem: StatementProblem): number {
  return problem.contrasts.extraCount + problem.modeCount * problem.statement.residualNames.length;
}

/**
 * Fits a statement's parameters.
 *
 * @param starts  points to search from; default: the statement's own
 * @param fixed  parameter held at its starting value, by number
 */
export function fitStatement(
  problem: StatementProblem,
  starts: readonly Float64Array[] = problem.statement.starts(problem.contrasts.columnsAtNodes, problem.nodes),
  fixed: number | null = null,
): StatementFit {
  const count = countComparisons(problem);
  const all = problem.statement.parameterNames.length;
  const free = Array.from({ length: all }, (_, i) => i).filter((i) => i !== fixed);
  const whiten = createWhitener(problem);
  const full = new Float64Array(all);
  const scales = measureScales(starts, all);
  let best: StatementFit | null = null;
  for (const start of rankStarts(starts, whiten, count)) {
    full.set(start);
    const residuals: ResidualsInto = (point, out) => {
      for (let i = 0; i < free.length; i++) full[free[i]] = point[i];
      whiten(full, out);
    };
    const from = Float64Array.from(free, (i) => start[i]);
    const found = minimizeSquares(residuals, count, from, {
      scales: Float64Array.from(free, (i) => scales[i]),
    });
    if (best !== null && !(found.value < best.statistic)) continue;
    const parameters = Float64Array.from(start);
    for (let i = 0; i < free.length; i++) parameters[free[i]] = found.point[i];
    best = {
      parameters,
      statistic: found.value,
      freedom: count - free.length,
      covariance: spreadCovariance(found.jacobian, count, free, all),
      jacobian: spreadColumns(found.jacobian, count, free, all),
      converged: found.converged,
    };
  }
  return (
    best ?? {
      parameters: new Float64Array(all).fill(Number.NaN),
      statistic: Infinity,
      freedom: count - free.length,
      covariance: new Float64Array(all * all).fill(Number.NaN),
      jacobian: new Float64Array(count * all),
      converged: false,
    }
  );
}

/** The numbers that should vanish, and their covariance. */
export interface Residuals {
  /** Length count: extras, then mode by mode. */
  readonly values: Float64Array;
  /** Shape (count, count): lower-triangular factor of the covariance; null where that is singular. */
  readonly lower: Float64Array | null;
}

/** Prepares the evaluation of h and its covariance; the arrays handed out are used again by the next call. */
export function createResiduals(problem: StatementProblem): (parameters: ArrayLike<number>) => Residuals {
  const { statement, contrasts, nodes, modes, modeCount } = problem;
  const { columnCount, extraCount, values, covariance } = contrasts;
  const total = values.length;
  const rows = statement.residualNames.length;
  const count = countComparisons(problem);
  const map = new Float64Array(count * total);
  const spread = new Float64Array(count * count);
  const lower = new Float64Array(count * count);
  const out = new Float64Array(count);
  let factored: Float64Array | null = null;
  let regular = false;
  const factor = (combination: Float64Array): void => {
    if (factored !== null && factored.every((value, i) => value === combination[i])) return;
    map.fill(0);
    for (let i = 0; i < extraCount; i++) map[i * total + i] = 1;
    for (let mode = 0; mode < modeCount; mode++) {
      for (let row = 0; row < rows; row++) {
        const at = (extraCount + mode * rows + row) * total + extraCount + mode * columnCount;
        map.set(combination.subarray(row * columnCount, (row + 1) * columnCount), at);
      }
    }
    spreadInto(map, covariance, count, total, spread);
    regular = factorCholeskyInto(spread, count, lower);
    factored = combination.slice();
  };
  return (parameters) => {
    factor(statement.combination(parameters));
    for (let i = 0; i < count; i++) {
      out[i] = 0;
      for (let j = 0; j < total; j++) out[i] += map[i * total + j] * values[j];
    }
    const target = statement.target(parameters, nodes);
    if (target !== null) {
      const averages = averageOverModes(target, modes, modeCount);
      for (let i = extraCount; i < count; i++) out[i] -= averages[i - extraCount];
    }
    return { values: out, lower: regular ? lower : null };
  };
}

/** Writes C^(−1/2) h for given parameters; NaN where the statement has no value. */
function createWhitener(problem: StatementProblem): (parameters: Float64Array, out: Float64Array) => void {
  const evaluate = createResiduals(problem);
  return (parameters, out) => {
    const { values, lower } = evaluate(parameters);
    if (lower === null) {
      out.fill(Number.NaN);
      return;
    }
    out.set(values);
    solveLowerInPlace(lower, values.length, out);
  };
}

function spreadInto(
  map: Float64Array,
  covariance: Float64Array,
  count: number,
  total: number,
  out: Float64Array,
): void {
  const half = new Float64Array(count * total);
  for (let i = 0; i < count; i++) {
    for (let l = 0; l < total; l++) {
      const weight = map[i * total + l];
      if (weight === 0) continue;
      for (let j = 0; j < total; j++) half[i * total + j] += weight * covariance[l * total + j];
    }
  }
  for (let i = 0; i < count; i++) {
    for (let j = 0; j < count; j++) {
      let sum = 0;
      for (let l = 0; l < total; l++) sum += half[i * total + l] * map[j * total + l];
      out[i * count + j] = sum;
    }
  }
}

/** The starts with the smallest distances; forbidden ones are left out. */
function rankStarts(
  starts: readonly Float64Array[],
  whiten: (parameters: Float64Array, out: Float64Array) => void,
  count: number,
): Float64Array[] {
  const out = new Float64Array(count);
  return starts
    .map((start) => {
      whiten(start, out);
      let distance = 0;
      for (let i = 0; i < count; i++) distance += out[i] * out[i];
      return { start, distance };
    })
    .filter(({ distance }) => Number.isFinite(distance))
    .sort((a, b) => a.distance - b.distance)
    .slice(0, POLISHED_STARTS)
    .map(({ start }) => start);
}

/** Columns of the free parameters among those of all. */
function spreadColumns(
  jacobian: Float64Array,
  rows: number,
  free: readonly number[],
  all: number,
): Float64Array {
  const out = new Float64Array(rows * all);
  for (let row = 0; row < rows; row++) {
    for (let i = 0; i < free.length; i++) out[row * all + free[i]] = jacobian[row * free.length + i];
  }
  return out;
}

/** Typical size of each parameter over the starts. */
function measureScales(starts: readonly Float64Array[], count: number): Float64Array {
  const scales = new Float64Array(count);
  for (const start of starts)
    for (let i = 0; i < count; i++) scales[i] = Math.max(scales[i], Math.abs(start[i]));
  return scales.map((scale) => scale || 1);
}

/** (JᵀJ)⁻¹ of the free parameters in a matrix of all; NaN where singular. */
function spreadCovariance(
  jacobian: Float64Array,
  rows: number,
  free: readonly number[],
  all: number,
): Float64Array {
  const p = free.length;
  const normal = new Float64Array(p * p);
  for (let row = 0; row < rows; row++) {
    for (let i = 0; i < p; i++)
      for (let j = 0; j < p; j++) normal[i * p + j] += jacobian[row * p + i] * jacobian[row * p + j];
  }
  const out = new Float64Array(all * all);
  // Scaled to unit diagonal, so that units play no part in what counts as singular.
  const sizes = Float64Array.from({ length: p }, (_, i) => Math.sqrt(normal[i * p + i]));
  for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) normal[i * p + j] /= sizes[i] * sizes[j];
  const lower = new Float64Array(p * p);
  const regular =
    factorCholeskyInto(normal, p, lower) && free.every((_, i) => lower[i * p + i] > SINGULAR_PIVOT);
  const column = new Float64Array(p);
  for (let j = 0; j < p; j++) {
    column.fill(0);
    column[j] = 1;
    if (regular) {
      solveLowerInPlace(lower, p, column);
      solveUpperInPlace(lower, p, column);
    } else {
      column.fill(Number.NaN);
    }
    for (let i = 0; i < p; i++) out[free[i] * all + free[j]] = column[i] / (sizes[i] * sizes[j]);
  }
  return out;
}

/** Pivot of the scaled normal matrix below which two parameters do the same thing (up to rounding of differences). */
const SINGULAR_PIVOT = 1e-5;
