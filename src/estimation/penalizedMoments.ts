/**
 * Linear moment conditions with roughness penalties: the common core of every difference estimator.
 *
 * Blocks of data (tracks, or stretches of tracks) each bring a matrix A_b and a vector c_b with E[c_b − A_b θ] = 0.
 * The estimate minimises (c − Aθ)ᵀ W (c − Aθ) + Σ_g λ_g θᵀ P_g θ with c = Σ c_b, A = Σ A_b and W the inverse of the
 * Gram matrix of the instruments (two-stage least squares; ordinary least squares where A is that Gram matrix).
 * The strengths λ_g minimise the same distance on blocks left out (block cross-validation).
 *
 * Symbols: `p` parameters, `B` blocks. Matrices row-major.
 *
 * Source  Hansen, Large sample properties of generalized method of moments estimators, Econometrica 50 (1982) 1029;
 *         Eilers & Marx, Flexible smoothing with B-splines and penalties, Statist. Sci. 11 (1996) 89.
 */

import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { NumericalError } from '../errors.js';
import {
  factorCholeskyInto,
  solveLowerInPlace,
  solveUpperInPlace,
} from '../numerics/linear/choleskyFactor.js';
import {
  addMultiple,
  crossProduct,
  innerProduct,
  invertFactored,
  multiply,
  solveLowerRows,
  solveUpperRows,
  timesVector,
  trace,
  transpose,
} from '../numerics/linear/denseMatrix.js';

export interface MomentBlocks {
  readonly size: number;
  /** Per block: shape (p, p). */
  readonly matrices: readonly Float64Array[];
  /** Per block: shape (p). */
  readonly vectors: readonly Float64Array[];
  /** Gram matrix of the instruments over all blocks, shape (p, p). */
  readonly instrumentGram: Float64Array;
}

/** One roughness penalty, applied to several stretches of the parameter vector with a common strength. */
export interface PenaltyGroup {
  readonly offsets: readonly number[];
  /** Shape (k, k), k the length of each stretch. */
  readonly roughness: Float64Array;
  readonly functionCount: number;
  /** Relative strength that is not for the data to choose; its bias is taken as negligible. */
  readonly fixedStrength?: number;
}

export interface MomentSolution {
  readonly parameters: Float64Array;
  /** Shape (B, p): how much each block moves the estimate, to first order; used by the bootstrap. */
  readonly influences: Float64Array;
  /** Shape (p, q) or null: smoothing bias as a random effect, bias = factor · standard normal vector. */
  readonly smoothingFactor: { readonly values: Float64Array; readonly columns: number } | null;
  /** Inverse of the penalised system, shape (p, p): moves the parameters by inverse · Aᵀ W · (change of moments). */
  readonly inverse: Float64Array;
  /** Moves the parameters by bread · (change of the moment vector), shape (p, p). */
  readonly bread: Float64Array;
  /** Chosen strengths, relative to the information, one per group. */
  readonly strengths: readonly number[];
  /** Trace of the smoother: how many parameters' worth of freedom the fit used. */
  readonly effectiveParameters: number;
  /**
   * Ratio of largest to smallest pivot of the final system with unit diagonal: a cheap lower bound of its condition
   * number that does not depend on units.
   */
  readonly conditioning: number;
}

const FOLDS = 6; // enough for a stable choice; each costs one factorisation per trial strength
const STRENGTHS = [1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 1e-1, 1, 1e1, 1e2, 1e4]; // relative to the mean information per parameter
const RIDGE = 1e-10; // relative; keeps directions nobody visited from making the system singular
const GRAM_RIDGE = 1e-9; // the same for the Gram matrix of the instruments

/**
 * Solves penalised moment conditions, choosing the strengths by block cross-validation.
 *
 * @param groups  penalties; without any, the plain solution
 * @param known  strengths to use as they are, one per group; without them they are chosen from the data
 * @throws NumericalError  where the moments hold no information at all
 *
 * Cost  O(folds · strengths · groups · p³).
 */
export function solvePenalizedMoments(
  moments: MomentBlocks,
  groups: readonly PenaltyGroup[],
  known?: readonly number[],
): MomentSolution {
  const p = moments.size;
  const whiten = whiteningOf(moments, groups);
  const folds = foldMoments(
    moments,
    whiten,
    !known && groups.some((group) => group.fixedStrength === undefined)
      ? Math.min(FOLDS, moments.matrices.length)
      : 1,
  );
  const information = crossProduct(folds.totalMatrix, p, p);
  const groupScales = groups.map((group) => informationScale(information, p, group));
  const ridge = parameterScales(information, p, groups).map((scale) => RIDGE * scale);

  const strengths = groups.map((group, g) => group.fixedStrength ?? known?.[g] ?? 1e-2);
  if (folds.parts.length > 1) {
    const judge = crossValidation(folds, groups, groupScales, ridge);
    for (let sweep = 0; sweep < (groups.length > 1 ? 2 : 1); sweep++) {
      for (let g = 0; g < groups.length; g++) {
        if (groups[g].fixedStrength !== undefined) continue;
        let best = Infinity;
        let chosen = strengths[g];
        for (const trial of STRENGTHS) {
          const score = judge(strengths.map((strength, index) => (index === g ? trial : strength)));
          if (score < best) {
            best = score;
            chosen = trial;
          }
        }
        strengths[g] = chosen;
      }
    }
  }

  const system = penaltyMatrix(groups, strengths, groupScales, ridge);
  for (let i = 0; i < system.length; i++) system[i] += information[i];
  const factor = factorize(system, p);
  const parameters = timesVector(transpose(folds.totalMatrix, p, p), folds.totalVector);
  solveLowerInPlace(factor, p, parameters);
  solveUpperInPlace(factor, p, parameters);
  const inverse = invertFactored(factor, p);
  const bread = multiply(inverse, transpose(folds.totalMatrix, p, p), p, p, p); // H⁻¹ Ãᵀ
  const influences = blockInfluences(moments, whiten, bread, parameters);
  const smoother = multiply(inverse, information, p, p, p);
  return {
    parameters,
    influences,
    smoothingFactor: smoothingFactorOf(
      groups,
      strengths,
      groupScales,
      inverse,
      information,
      smoother,
      influences,
      p,
    ),
    inverse,
    bread: solveUpperRight(bread, whiten, p),
    strengths: [...strengths],
    effectiveParameters: trace(smoother, p),
    conditioning: pivotRatio(factor, system, p),
  };
}

interface FoldedMoments {
  /** Shapes (p, p) and (p), whitened. */
  readonly parts: readonly { readonly matrix: Float64Array; readonly vector: Float64Array }[];
  readonly totalMatrix: Float64Array;
  readonly totalVector: Float64Array;
}

/** Lower-triangular L with L Lᵀ = Gram of the instruments; moments are divided by it so that W becomes the identity. */
function whiteningOf(moments: MomentBlocks, groups: readonly PenaltyGroup[]): Float64Array {
  const p = moments.size;
  const gram = moments.instrumentGram.slice();
  if (!(trace(gram, p) > 0)) {
    throw new NumericalError('the regression has no usable rows; give longer gap-free tracks');
  }
  const scales = parameterScales(gram, p, groups);
  for (let i = 0; i < p; i++) gram[i * p + i] += GRAM_RIDGE * scales[i];
  return factorize(gram, p);
}

/**
 * The size of each diagonal entry that a ridge is relative to: the mean over its penalty group, the entry itself
 * outside of any. Parameters of different units never share a scale, so results do not depend on units.
 */
function parameterScales(matrix: Float64Array, p: number, groups: readonly PenaltyGroup[]): Float64Array {
  const scales = Float64Array.from({ length: p }, (_, i) => matrix[i * p + i]);
  for (const group of groups) {
    const mean = informationScale(matrix, p, group);
    for (const offset of group.offsets) scales.fill(mean, offset, offset + group.functionCount);
  }
  const fallback = Math.max(trace(matrix, p) / p, Number.MIN_VALUE);
  return scales.map((scale) => (scale > 0 ? scale : fallback));
}

function foldMoments(moments: MomentBlocks, whiten: Float64Array, foldCount: number): FoldedMoments {
  const p = moments.size;
  const parts = [];
  const totalMatrix = new Float64Array(p * p);
  const totalVector = new Float64Array(p);
  for (let fold = 0; fold < foldCount; fold++) {
    const matrix = new Float64Array(p * p);
    const vector = new Float64Array(p);
    for (let block = fold; block < moments.matrices.length; block += foldCount) {
      addInto(matrix, moments.matrices[block]);
      addInto(vector, moments.vectors[block]);
    }
    solveLowerRows(whiten, p, matrix, p);
    solveLowerInPlace(whiten, p, vector);
    addInto(totalMatrix, matrix);
    addInto(totalVector, vector);
    parts.push({ matrix, vector });
  }
  return { parts, totalMatrix, totalVector };
}

/** Returns the function that scores trial strengths by the left-out distance. */
function crossValidation(
  folds: FoldedMoments,
  groups: readonly PenaltyGroup[],
  scales: readonly number[],
  ridge: Float64Array,
): (strengths: readonly number[]) => number {
  const p = folds.totalVector.length;
  const training = folds.parts.map((part) => {
    const matrix = folds.totalMatrix.map((value, i) => value - part.matrix[i]);
    const vector = folds.totalVector.map((value, i) => value - part.vector[i]);
    return { normal: crossProduct(matrix, p, p), right: timesVector(transpose(matrix, p, p), vector), part };
  });
  const share = ((folds.parts.length - 1) / folds.parts.length) ** 2; // information left, up to the fixed weight
  const system = new Float64Array(p * p);
  const factor = new Float64Array(p * p);
  return (strengths) => {
    const penalty = penaltyMatrix(groups, strengths, scales, ridge);
    let score = 0;
    for (const { normal, right, part } of training) {
      for (let i = 0; i < system.length; i++) system[i] = normal[i] + share * penalty[i];
      factorInto(system, p, factor);
      const parameters = right.slice();
      solveLowerInPlace(factor, p, parameters);
      solveUpperInPlace(factor, p, parameters);
      const fitted = timesVector(part.matrix, parameters);
      for (let i = 0; i < p; i++) score += (part.vector[i] - fitted[i]) ** 2;
    }
    return score;
  };
}

function penaltyMatrix(
  groups: readonly PenaltyGroup[],
  strengths: readonly number[],
  scales: readonly number[],
  ridge: Float64Array,
): Float64Array {
  const p = ridge.length;
  const penalty = new Float64Array(p * p);
  for (let i = 0; i < p; i++) penalty[i * p + i] = ridge[i];
  groups.forEach((group, g) => {
    const weight = strengths[g] * scales[g];
    const k = group.functionCount;
    for (const offset of group.offsets) {
      for (let i = 0; i < k; i++) {
        addMultiple(penalty, (offset + i) * p + offset, weight, group.roughness, i * k, k);
      }
    }
  });
  return penalty;
}

/** Mean diagonal information of a group's parameters: strengths are quoted relative to it. */
function informationScale(information: Float64Array, p: number, group: PenaltyGroup): number {
  let sum = 0;
  for (const offset of group.offsets) {
    for (let i = offset; i < offset + group.functionCount; i++) sum += information[i * p + i];
  }
  return sum / (group.offsets.length * group.functionCount);
}

/** Shape (B, p): bread times what each block leaves of its moments. */
function blockInfluences(
  moments: MomentBlocks,
  whiten: Float64Array,
  bread: Float64Array,
  parameters: Float64Array,
): Float64Array {
  const p = moments.size;
  const blocks = moments.matrices.length;
  const influences = new Float64Array(blocks * p);
  for (let block = 0; block < blocks; block++) {
    const fitted = timesVector(moments.matrices[block], parameters);
    const residuals = moments.vectors[block].map((value, i) => value - fitted[i]);
    solveLowerInPlace(whiten, p, residuals);
    influences.set(timesVector(bread, residuals), block * p);
  }
  return influences;
}

/**
 * Smoothing bias as a random effect. Under the prior that makes the penalty natural, the bias of the estimate has
 * covariance τ² H⁻¹ (λP) H⁻¹, with τ² the scale that brings the model's covariance in line with the observed one.
 *
 * Source  Nychka, Bayesian confidence intervals for smoothing splines, J. Am. Stat. Assoc. 83 (1988) 1134;
 *         Marra & Wood, Coverage properties of confidence intervals for generalized additive model components,
 *         Scand. J. Stat. 39 (2012) 53.
 */
function smoothingFactorOf(
  groups: readonly PenaltyGroup[],
  strengths: readonly number[],
  scales: readonly number[],
  inverse: Float64Array,
  information: Float64Array,
  smoother: Float64Array,
  influences: Float64Array,
  p: number,
): MomentSolution['smoothingFactor'] {
  if (groups.every((group) => group.fixedStrength !== undefined)) return null;
  const blocks = influences.length / p;
  const observed = innerProduct(
    multiply(influences, information, blocks, p, p),
    0,
    influences,
    0,
    influences.length,
  );
  const modelled = innerProduct(smoother, 0, transpose(smoother, p, p), 0, p * p);
  const scale = Math.sqrt(observed / Math.max(modelled, Number.MIN_VALUE));
  const columns: Float64Array[] = [];
  groups.forEach((group, g) => {
    if (group.fixedStrength !== undefined) return;
    const k = group.functionCount;
    const { values, vectors } = symmetricEigen(group.roughness, k);
    for (const offset of group.offsets) {
      for (let e = 0; e < k; e++) {
        if (values[e] <= 1e-9 * values[k - 1]) continue;
        const size = scale * Math.sqrt(strengths[g] * scales[g] * values[e]);
        const column = new Float64Array(p);
        for (let i = 0; i < p; i++) {
          let sum = 0;
          for (let j = 0; j < k; j++) sum += inverse[i * p + offset + j] * vectors.get(j, e);
          column[i] = size * sum;
        }
        columns.push(column);
      }
    }
  });
  const values = new Float64Array(p * columns.length);
  columns.forEach((column, c) => {
    for (let i = 0; i < p; i++) values[i * columns.length + c] = column[i];
  });
  return { values, columns: columns.length };
}

function symmetricEigen(flat: Float64Array, k: number): { values: number[]; vectors: Matrix } {
  const decomposition = new EigenvalueDecomposition(Matrix.from1DArray(k, k, flat), {
    assumeSymmetric: true,
  });
  return { values: decomposition.realEigenvalues, vectors: decomposition.eigenvectorMatrix };
}

/** Lower-triangular factor of a positive definite matrix, shape (p, p). */
function factorize(matrix: Float64Array, p: number): Float64Array {
  const factor = new Float64Array(p * p);
  factorInto(matrix, p, factor);
  return factor;
}

function factorInto(matrix: Float64Array, p: number, factor: Float64Array): void {
  if (factorCholeskyInto(matrix, p, factor)) return;
  throw new NumericalError(
    'the regression is singular: the data do not tell its functions apart; use fewer functions (a smaller spline:N) or constant',
  );
}

/** X with X L = R for lower-triangular L, so that X acts on moments that are not yet whitened; all of shape (p, p). */
function solveUpperRight(right: Float64Array, lower: Float64Array, p: number): Float64Array {
  const turned = transpose(right, p, p);
  solveUpperRows(lower, p, turned, p);
  return transpose(turned, p, p);
}

function pivotRatio(lower: Float64Array, system: Float64Array, p: number): number {
  let largest = 0;
  let smallest = Infinity;
  for (let i = 0; i < p; i++) {
    const pivot = lower[i * p + i] ** 2 / system[i * p + i];
    largest = Math.max(largest, pivot);
    smallest = Math.min(smallest, pivot);
  }
  return largest / smallest;
}

function addInto(target: Float64Array, source: Float64Array): void {
  for (let i = 0; i < target.length; i++) target[i] += source[i];
}
