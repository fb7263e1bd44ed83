/**
 * Penalised Fisher scoring with strengths chosen by marginal likelihood.
 *
 * The estimate solves  Σ_b s_b(θ) − S_λ θ = 0  with the block scores s_b and S_λ = Σ_g λ_g P_g. Steps are
 * (I + S_λ)⁻¹ (Σ s_b − S_λ θ) with a metric I that is positive semi-definite; after every step each strength moves to
 *
 *     λ_g ← (rank P_g − λ_g tr[(I + S_λ)⁻¹ P_g]) / (θᵀ P_g θ),
 *
 * whose fixed point maximises the Laplace approximation of the marginal likelihood.
 *
 * Source  Wood & Fasiolo, A generalized Fellner–Schall method for smoothing parameter optimization, Biometrics 73 (2017)
 *         1071; Fisher scoring: Rao, Proc. Camb. Phil. Soc. 44 (1948) 50.
 */

import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { NumericalError } from '../../errors.js';
import type { PenaltyGroup } from '../penalizedMoments.js';

/** A roughness penalty and how many directions of one stretch it acts on. */
export interface RankedPenalty extends PenaltyGroup {
  readonly rank: number;
}

export interface ScoringProblem {
  readonly size: number;
  readonly blocks: number;
  readonly groups: readonly RankedPenalty[];
  /** Log-likelihood at a point; fills the block scores, shape (B, p), where given. */
  evaluate(parameters: Float64Array, scores: Float64Array | null): number;
  /** The metric at a point, shape (p, p), positive semi-definite. */
  information(parameters: Float64Array): Float64Array;
  /** Moves a point to where it may be (bounds), in place. */
  confine(parameters: Float64Array): void;
}

export interface ScoringSolution {
  readonly parameters: Float64Array;
  /** Shape (B, p), at the solution. */
  readonly scores: Float64Array;
  /** (I + S_λ)⁻¹, shape (p, p). */
  readonly inverse: Matrix;
  readonly information: Float64Array;
  readonly strengths: Float64Array;
  readonly logLikelihood: number;
  readonly effectiveParameters: number;
  readonly iterations: number;
  readonly converged: boolean;
}

const MOST_ITERATIONS = 80;
const STEP_TOLERANCE = 0.02; // of a standard error, largest over the parameters
const STRENGTH_TOLERANCE = 0.05; // of log λ, where λ matters
const START_SHARE = 1e-2; // of the information a penalty starts with
const STIFFEST = 1e7; // strengths relative to the information beyond which a field is as smooth as it can be
const SOFTEST = 1e-9;
const HALVINGS = 6;
const RIDGE = 1e-9; // relative; keeps directions that nothing tells apart from making the system singular

/** Solves the penalised score equation. */
export function solveScores(problem: ScoringProblem, start: Float64Array): ScoringSolution {
  const { size: p, groups } = problem;
  let parameters = start.slice();
  problem.confine(parameters);
  let scores = new Float64Array(problem.blocks * p);
  let trialScores = new Float64Array(problem.blocks * p);
  let logLikelihood = problem.evaluate(parameters, scores);
  let information = problem.information(parameters);
  const strengths = Float64Array.from(groups, (group) => START_SHARE * scaleOf(information, p, group));
  let converged = false;
  let iterations = 0;
  let inverse = invertSystem(information, groups, strengths, p);
  while (iterations < MOST_ITERATIONS && !converged) {
    iterations++;
    const gradient = sumScores(scores, p);
    subtractPenalty(gradient, groups, strengths, parameters);
    const step = Float64Array.from(inverse.mmul(Matrix.columnVector(gradient)).to1DArray());
    const before = logLikelihood - penaltyOf(groups, strengths, parameters) / 2;
    let length = 1;
    let moved = parameters;
    let reached = -Infinity;
    for (let halving = 0; halving <= HALVINGS; halving++) {
      moved = parameters.map((value, i) => value + length * step[i]);
      problem.confine(moved);
      const trial = problem.evaluate(moved, trialScores);
      reached = trial;
      // The coefficients' places move with them, so the score is not quite a gradient: a small loss is no refusal.
      if (trial - penaltyOf(groups, strengths, moved) / 2 > before - 0.05) break;
      length /= 2;
    }
    let largest = 0;
    for (let i = 0; i < p; i++) {
      const error = Math.sqrt(Math.max(inverse.get(i, i), 0));
      if (error > 0) largest = Math.max(largest, Math.abs(moved[i] - parameters[i]) / error);
    }
    parameters = moved;
    logLikelihood = reached;
    [scores, trialScores] = [trialScores, scores];
    information = problem.information(parameters);
    const change = updateStrengths(groups, strengths, information, inverse, parameters, p);
    inverse = invertSystem(information, groups, strengths, p);
    converged = largest < STEP_TOLERANCE && change < STRENGTH_TOLERANCE;
  }
  return {
    parameters,
    scores,
    inverse,
    information,
    strengths,
    logLikelihood,
    effectiveParameters: traceOfProduct(inverse, information, p),
    iterations,
    converged,
  };
}

/** One move of every strength; returns the largest change of a logarithm that still matters. */
function updateStrengths(
  groups: readonly RankedPenalty[],
  strengths: Float64Array,
  information: Float64Array,
  inverse: Matrix,
  parameters: Float64Array,
  p: number,
): number {
  let largest = 0;
  groups.forEach((group, g) => {
    const { offsets, functionCount: k, roughness, rank } = group;
    let trace = 0;
    let form = 0;
    for (const offset of offsets) {
      for (let i = 0; i < k; i++) {
        for (let j = 0; j < k; j++) {
          const weight = roughness[i * k + j];
          if (weight === 0) continue;
          trace += weight * inverse.get(offset + i, offset + j);
          form += weight * parameters[offset + i] * parameters[offset + j];
        }
      }
    }
    const free = Math.max(rank * offsets.length - strengths[g] * trace, 1e-6);
    const scale = scaleOf(information, p, group);
    const wanted = Math.min(Math.max(free / Math.max(form, 1e-300), SOFTEST * scale), STIFFEST * scale);
    const change = Math.log(wanted / strengths[g]);
    strengths[g] = wanted;
    if (free > 0.1) largest = Math.max(largest, Math.abs(change) * Math.min(1, free));
  });
  return largest;
}

/** Mean information of a group's parameters. */
function scaleOf(information: Float64Array, p: number, group: PenaltyGroup): number {
  let sum = 0;
  for (const offset of group.offsets)
    for (let i = offset; i < offset + group.functionCount; i++) sum += information[i * p + i];
  return Math.max(sum / (group.offsets.length * group.functionCount), 1e-300);
}

function sumScores(scores: Float64Array, p: number): Float64Array {
  const sum = new Float64Array(p);
  for (let i = 0; i < scores.length; i++) sum[i % p] += scores[i];
  return sum;
}

function subtractPenalty(
  gradient: Float64Array,
  groups: readonly PenaltyGroup[],
  strengths: Float64Array,
  parameters: Float64Array,
): void {
  groups.forEach(({ offsets, functionCount: k, roughness }, g) => {
    for (const offset of offsets) {
      for (let i = 0; i < k; i++) {
        let sum = 0;
        for (let j = 0; j < k; j++) sum += roughness[i * k + j] * parameters[offset + j];
        gradient[offset + i] -= strengths[g] * sum;
      }
    }
  });
}

function penaltyOf(
  groups: readonly PenaltyGroup[],
  strengths: Float64Array,
  parameters: Float64Array,
): number {
  let total = 0;
  groups.forEach(({ offsets, functionCount: k, roughness }, g) => {
    for (const offset of offsets) {
      for (let i = 0; i < k; i++) {
        for (let j = 0; j < k; j++)
          total += strengths[g] * roughness[i * k + j] * parameters[offset + i] * parameters[offset + j];
      }
    }
  });
  return total;
}

/** (I + S_λ + ridge)⁻¹. */
export function invertSystem(
  information: Float64Array,
  groups: readonly PenaltyGroup[],
  strengths: Float64Array,
  p: number,
): Matrix {
  const system = Matrix.from1DArray(p, p, information);
  const typical = Float64Array.from({ length: p }, (_, i) => information[i * p + i]);
  for (const group of groups) {
    const scale = scaleOf(information, p, group);
    for (const offset of group.offsets) typical.fill(scale, offset, offset + group.functionCount);
  }
  for (let i = 0; i < p; i++) system.set(i, i, system.get(i, i) + RIDGE * Math.max(typical[i], 1e-300));
  groups.forEach(({ offsets, functionCount: k, roughness }, g) => {
    for (const offset of offsets) {
      for (let i = 0; i < k; i++) {
        for (let j = 0; j < k; j++) {
          const weight = roughness[i * k + j];
          if (weight !== 0)
            system.set(offset + i, offset + j, system.get(offset + i, offset + j) + strengths[g] * weight);
        }
      }
    }
  });
  // Unit diagonal first: parameters of different units differ by orders of magnitude.
  const scales = Array.from({ length: p }, (_, i) => 1 / Math.sqrt(system.get(i, i)));
  scaleSymmetric(system, scales);
  const factor = new CholeskyDecomposition(system);
  if (!factor.isPositiveDefinite()) {
    throw new NumericalError(
      'the likelihood has no curvature in some direction: the data do not tell the functions apart; use fewer functions (a smaller spline:N) or constant',
    );
  }
  const inverse = factor.solve(Matrix.eye(p, p));
  scaleSymmetric(inverse, scales);
  return inverse;
}

/** Multiplies entry (i, j) by both scales, and makes the matrix symmetric to the last bit. */
function scaleSymmetric(matrix: Matrix, scales: readonly number[]): void {
  for (let i = 0; i < scales.length; i++) {
    for (let j = 0; j <= i; j++) {
      const value = matrix.get(i, j) * (scales[i] * scales[j]);
      matrix.set(i, j, value);
      matrix.set(j, i, value);
    }
  }
}

function traceOfProduct(inverse: Matrix, information: Float64Array, p: number): number {
  let sum = 0;
  for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) sum += inverse.get(i, j) * information[j * p + i];
  return sum;
}
