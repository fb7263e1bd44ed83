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

import { CholeskyDecomposition, EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { NumericalError } from '../errors.js';

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
  const information = crossProduct(folds.totalMatrix);
  const groupScales = groups.map((group) => informationScale(information, group));
  const ridge = parameterScales(information, groups).map((scale) => RIDGE * scale);

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

  const system = Matrix.add(information, penaltyMatrix(groups, strengths, groupScales, ridge));
  const factor = factorize(system);
  const right = folds.totalMatrix.transpose().mmul(folds.totalVector);
  const solution = factor.solve(right);
  const inverse = factor.solve(Matrix.eye(p, p));
  const bread = inverse.mmul(folds.totalMatrix.transpose()); // H⁻¹ Ãᵀ

  const parameters = Float64Array.from(solution.to1DArray());
  const influences = blockInfluences(moments, whiten, bread, parameters);
  const smoother = inverse.mmul(information);
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
    inverse: Float64Array.from(inverse.to1DArray()),
    bread: Float64Array.from(solveUpperRight(bread, whiten).to1DArray()),
    strengths: [...strengths],
    effectiveParameters: trace(smoother),
    conditioning: pivotRatio(factor, system),
  };
}

interface FoldedMoments {
  readonly parts: readonly { readonly matrix: Matrix; readonly vector: Matrix }[];
  readonly totalMatrix: Matrix;
  readonly totalVector: Matrix;
}

/** Lower-triangular L with L Lᵀ = Gram of the instruments; moments are divided by it so that W becomes the identity. */
function whiteningOf(moments: MomentBlocks, groups: readonly PenaltyGroup[]): Matrix {
  const gram = Matrix.from1DArray(moments.size, moments.size, moments.instrumentGram);
  if (!(trace(gram) > 0)) {
    throw new NumericalError('the regression has no usable rows; give longer gap-free tracks');
  }
  const scales = parameterScales(gram, groups);
  for (let i = 0; i < moments.size; i++) gram.set(i, i, gram.get(i, i) + GRAM_RIDGE * scales[i]);
  return factorize(gram).lowerTriangularMatrix;
}

/**
 * The size of each diagonal entry that a ridge is relative to: the mean over its penalty group, the entry itself
 * outside of any. Parameters of different units never share a scale, so results do not depend on units.
 */
function parameterScales(matrix: Matrix, groups: readonly PenaltyGroup[]): Float64Array {
  const scales = Float64Array.from(matrix.diagonal());
  for (const group of groups) {
    const mean = informationScale(matrix, group);
    for (const offset of group.offsets) scales.fill(mean, offset, offset + group.functionCount);
  }
  const fallback = Math.max(trace(matrix) / matrix.rows, Number.MIN_VALUE);
  return scales.map((scale) => (scale > 0 ? scale : fallback));
}

function foldMoments(moments: MomentBlocks, whiten: Matrix, foldCount: number): FoldedMoments {
  const p = moments.size;
  const parts = [];
  for (let fold = 0; fold < foldCount; fold++) {
    const matrix = new Float64Array(p * p);
    const vector = new Float64Array(p);
    for (let block = fold; block < moments.matrices.length; block += foldCount) {
      addInto(matrix, moments.matrices[block]);
      addInto(vector, moments.vectors[block]);
    }
    parts.push({
      matrix: solveLower(whiten, Matrix.from1DArray(p, p, matrix)),
      vector: solveLower(whiten, Matrix.columnVector(vector)),
    });
  }
  const totalMatrix = parts.slice(1).reduce((sum, part) => Matrix.add(sum, part.matrix), parts[0].matrix);
  const totalVector = parts.slice(1).reduce((sum, part) => Matrix.add(sum, part.vector), parts[0].vector);
  return { parts, totalMatrix, totalVector };
}

/** Returns the function that scores trial strengths by the left-out distance. */
function crossValidation(
  folds: FoldedMoments,
  groups: readonly PenaltyGroup[],
  scales: readonly number[],
  ridge: Float64Array,
): (strengths: readonly number[]) => number {
  const training = folds.parts.map((part) => {
    const matrix = Matrix.sub(folds.totalMatrix, part.matrix);
    const vector = Matrix.sub(folds.totalVector, part.vector);
    return { normal: crossProduct(matrix), right: matrix.transpose().mmul(vector), part };
  });
  const share = ((folds.parts.length - 1) / folds.parts.length) ** 2; // information left, up to the fixed weight
  return (strengths) => {
    const penalty = penaltyMatrix(groups, strengths, scales, ridge).mul(share);
    let score = 0;
    for (const { normal, right, part } of training) {
      const parameters = factorize(Matrix.add(normal, penalty)).solve(right);
      const residual = Matrix.sub(part.vector, part.matrix.mmul(parameters));
      score += residual.dot(residual);
    }
    return score;
  };
}

function penaltyMatrix(
  groups: readonly PenaltyGroup[],
  strengths: readonly number[],
  scales: readonly number[],
  ridge: Float64Array,
): Matrix {
  const penalty = Matrix.diag(Array.from(ridge));
  groups.forEach((group, g) => {
    const weight = strengths[g] * scales[g];
    const k = group.functionCount;
    for (const offset of group.offsets) {
      for (let i = 0; i < k; i++) {
        for (let j = 0; j < k; j++) {
          const value = group.roughness[i * k + j];
          if (value !== 0)
            penalty.set(offset + i, offset + j, penalty.get(offset + i, offset + j) + weight * value);
        }
      }
    }
  });
  return penalty;
}

/** Mean diagonal information of a group's parameters: strengths are quoted relative to it. */
function informationScale(information: Matrix, group: PenaltyGroup): number {
  let sum = 0;
  for (const offset of group.offsets) {
    for (let i = 0; i < group.functionCount; i++) sum += information.get(offset + i, offset + i);
  }
  return sum / (group.offsets.length * group.functionCount);
}

function blockInfluences(
  moments: MomentBlocks,
  whiten: Matrix,
  bread: Matrix,
  parameters: Float64Array,
): Float64Array {
  const p = moments.size;
  const blocks = moments.matrices.length;
  const residuals = Matrix.zeros(p, blocks);
  for (let block = 0; block < blocks; block++) {
    const matrix = moments.matrices[block];
    const vector = moments.vectors[block];
    for (let i = 0; i < p; i++) {
      let sum = vector[i];
      const row = i * p;
      for (let j = 0; j < p; j++) sum -= matrix[row + j] * parameters[j];
      residuals.set(i, block, sum);
    }
  }
  const influence = bread.mmul(solveLower(whiten, residuals));
  const out = new Float64Array(blocks * p);
  for (let block = 0; block < blocks; block++) {
    for (let i = 0; i < p; i++) out[block * p + i] = influence.get(i, block);
  }
  return out;
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
  inverse: Matrix,
  information: Matrix,
  smoother: Matrix,
  influences: Float64Array,
  p: number,
): MomentSolution['smoothingFactor'] {
  if (groups.every((group) => group.fixedStrength !== undefined)) return null;
  const blocks = influences.length / p;
  const rows = Matrix.from1DArray(blocks, p, influences);
  const observed = rows.mmul(information).mul(rows).sum();
  const modelled = smoother.mmul(smoother).trace();
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
          for (let j = 0; j < k; j++) sum += inverse.get(i, offset + j) * vectors.get(j, e);
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

function factorize(matrix: Matrix): CholeskyDecomposition {
  const factor = new CholeskyDecomposition(matrix);
  if (!factor.isPositiveDefinite()) {
    throw new NumericalError(
      'the regression is singular: the data do not tell its functions apart; use fewer functions (a smaller spline:N) or constant',
    );
  }
  return factor;
}

/** Solves L X = R for lower-triangular L by forward substitution. */
function solveLower(lower: Matrix, right: Matrix): Matrix {
  const out = right.clone();
  const n = lower.rows;
  const columns = right.columns;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      const weight = lower.get(i, j);
      if (weight === 0) continue;
      for (let c = 0; c < columns; c++) out.set(i, c, out.get(i, c) - weight * out.get(j, c));
    }
    const pivot = lower.get(i, i);
    for (let c = 0; c < columns; c++) out.set(i, c, out.get(i, c) / pivot);
  }
  return out;
}

/** Solves X L = R for lower-triangular L, so that X acts on moments that are not yet whitened. */
function solveUpperRight(right: Matrix, lower: Matrix): Matrix {
  const out = right.clone();
  for (let j = lower.columns - 1; j >= 0; j--) {
    const pivot = lower.get(j, j);
    for (let i = 0; i < out.rows; i++) {
      let value = out.get(i, j);
      for (let l = j + 1; l < lower.rows; l++) value -= out.get(i, l) * lower.get(l, j);
      out.set(i, j, value / pivot);
    }
  }
  return out;
}

function crossProduct(matrix: Matrix): Matrix {
  return matrix.transpose().mmul(matrix);
}

function trace(matrix: Matrix): number {
  return matrix.trace();
}

function pivotRatio(factor: CholeskyDecomposition, system: Matrix): number {
  const pivots = factor.lowerTriangularMatrix.diagonal().map((pivot, i) => pivot ** 2 / system.get(i, i));
  return Math.max(...pivots) / Math.min(...pivots);
}

function addInto(target: Float64Array, source: Float64Array): void {
  for (let i = 0; i < target.length; i++) target[i] += source[i];
}
