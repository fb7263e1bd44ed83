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

import { NumericalError } from '../../errors.js';
import { factorPositive, type PositiveFactor } from '../../numerics/linear/factorPositive.js';
import type { ReportShare } from '../../numerics/ReportShare.js';
import type { PenaltyGroup } from '../penalizedMoments.js';
import { createConvergenceShare } from './convergenceShare.js';

/** A roughness penalty and how many directions of one stretch it acts on. */
export interface RankedPenalty extends PenaltyGroup {
  readonly rank: number;
}

/** A weak pull of every parameter towards a centre, which holds those that hardly any data reach; length p each. */
export interface Pull {
  readonly precision: Float64Array;
  readonly centre: Float64Array;
}

export interface ScoringProblem {
  readonly size: number;
  readonly blocks: number;
  readonly groups: readonly RankedPenalty[];
  readonly pull: Pull;
  /** Length p: parameters in an order that brings those of neighbouring places together. */
  readonly order: Int32Array;
  /** Log-likelihood at a point; fills the block scores, shape (B, p), where given. */
  evaluate(parameters: Float64Array, scores: Float64Array | null): number;
  /** The metric at a point, shape (p, p), positive semi-definite; the one for steps may hold parameters in place. */
  information(parameters: Float64Array, onTheWay: boolean): Float64Array;
  /** Moves a point to where it may be (bounds, and not too far from where the step began), in place. */
  confine(parameters: Float64Array, from: Float64Array): void;
  /** Is told after every iteration about how far it has come. */
  readonly onProgress?: ReportShare;
}

export interface ScoringSolution {
  readonly parameters: Float64Array;
  /** Shape (B, p), at the solution. */
  readonly scores: Float64Array;
  /** (I + S_λ)⁻¹, shape (p, p). */
  readonly inverse: Float64Array;
  readonly information: Float64Array;
  readonly strengths: Float64Array;
  readonly logLikelihood: number;
  readonly effectiveParameters: number;
  readonly iterations: number;
  readonly converged: boolean;
}

const MOST_ITERATIONS = 80;
const TOLERANCE = 0.01; // squared length of a step in standard errors: no quantity moves by more than a tenth of its own
const SETTLED = 0.5; // of the effective parameters: squared step length below which strengths move too
const STRENGTH_TOLERANCE = 0.05; // of log λ, where λ matters
const START_SHARE = 1e-2; // of the information a penalty starts with
const STIFFEST = 1e7; // strengths relative to the information beyond which a field is as smooth as it can be
const SOFTEST = 1e-9;
const FASTEST = 6; // times the plain step
const LONGEST_MOVE = 2; // of log λ at once
const SHORTENED = 0.75; // of a step that turned back
const HALVINGS = 6;
const RIDGE = 1e-9; // relative; keeps directions that nothing tells apart from making the system singular

/**
 * Solves the penalised score equation.
 *
 * @param startStrengths  one per group, or none: a share of the information
 */
export function solveScores(
  problem: ScoringProblem,
  start: Float64Array,
  startStrengths: readonly number[] = [],
): ScoringSolution {
  const { size: p, groups, pull } = problem;
  let parameters = start.slice();
  problem.confine(parameters, start);
  let scores = new Float64Array(problem.blocks * p);
  let trialScores = new Float64Array(problem.blocks * p);
  let logLikelihood = problem.evaluate(parameters, scores);
  let information = problem.information(parameters, true);
  const strengths = Float64Array.from(
    groups,
    (group, g) =>
      (group.fixedStrength === undefined ? startStrengths[g] : undefined) ??
      (group.fixedStrength ?? START_SHARE) * scaleOf(information, p, group),
  );
  const paces = groups.map(() => ({ factor: 1, last: 0 }));
  const tellShare = createConvergenceShare(problem.onProgress, TOLERANCE, STRENGTH_TOLERANCE);
  let relaxation = 1;
  let lastStep: Float64Array = new Float64Array(p);
  let converged = false;
  let iterations = 0;
  let factor = factorSystem(information, groups, strengths, pull, problem.order);
  while (iterations < MOST_ITERATIONS && !converged) {
    iterations++;
    const gradient = penalizedScore(scores, groups, strengths, pull, parameters);
    const step = factor.solve(gradient);
    const decrement = innerProduct(gradient, step);
    const before = logLikelihood - penaltyOf(groups, strengths, pull, parameters) / 2;
    // Steps that turn back on the one before overshoot: the metric is too small in some direction.
    relaxation =
      innerProduct(gradient, lastStep) < 0 ? relaxation * SHORTENED : Math.min(1, relaxation / SHORTENED);
    let length = relaxation;
    lastStep = step;
    let moved = parameters;
    for (let halving = 0; halving <= HALVINGS; halving++, length /= 2) {
      moved = parameters.map((value, i) => value + length * step[i]);
      problem.confine(moved, parameters);
      logLikelihood = problem.evaluate(moved, trialScores);
      // The places where coefficients are read move with them, so the score is not quite the gradient of the
      // likelihood: a step is good if it brings either nearer to where it should be.
      if (logLikelihood - penaltyOf(groups, strengths, pull, moved) / 2 > before) break;
      const left = penalizedScore(trialScores, groups, strengths, pull, moved);
      if (innerProduct(left, factor.solve(left)) < decrement) break;
    }
    parameters = moved;
    [scores, trialScores] = [trialScores, scores];
    information = problem.information(parameters, true);
    // Strengths are worth moving once the coefficients are about where the old ones want them.
    const inner = factor.innerInverse();
    const settled = decrement < SETTLED * (1 + innerProduct(inner, information));
    const change = settled
      ? updateStrengths(groups, strengths, paces, information, inner, parameters, p)
      : Infinity;
    factor = factorSystem(information, groups, strengths, pull, problem.order);
    converged = decrement < TOLERANCE && change < STRENGTH_TOLERANCE;
    tellShare(decrement, change);
  }
  information = problem.information(parameters, false);
  const inverse = factorSystem(information, groups, strengths, pull, problem.order).inverse();
  return {
    parameters,
    scores,
    inverse,
    information,
    strengths,
    logLikelihood,
    effectiveParameters: innerProduct(inverse, information),
    iterations,
    converged,
  };
}

/** How fast a strength moves: steps in the same direction are lengthened, for the plain iteration creeps. */
interface Pace {
  factor: number;
  last: number;
}

/** One move of every strength; returns the largest change of a logarithm that still matters. */
function updateStrengths(
  groups: readonly RankedPenalty[],
  strengths: Float64Array,
  paces: Pace[],
  information: Float64Array,
  inverse: Float64Array,
  parameters: Float64Array,
  p: number,
): number {
  let largest = 0;
  groups.forEach((group, g) => {
    if (group.fixedStrength !== undefined) return;
    const { offsets, functionCount: k, roughness, rank } = group;
    let trace = 0;
    let form = 0;
    for (const offset of offsets) {
      for (let i = 0; i < k; i++) {
        for (let j = 0; j < k; j++) {
          const weight = roughness[i * k + j];
          if (weight === 0) continue;
          trace += weight * inverse[(offset + i) * p + offset + j];
          form += weight * parameters[offset + i] * parameters[offset + j];
        }
      }
    }
    const free = Math.max(rank * offsets.length - strengths[g] * trace, 1e-6);
    const scale = scaleOf(information, p, group);
    const wanted = Math.min(Math.max(free / Math.max(form, 1e-300), SOFTEST * scale), STIFFEST * scale);
    const change = Math.log(wanted / strengths[g]);
    const pace = paces[g];
    pace.factor =
      change * pace.last > 0 ? Math.min(1.5 * pace.factor, FASTEST) : Math.max(1, pace.factor / 4);
    pace.last = change;
    const move = Math.min(Math.max(change * pace.factor, -LONGEST_MOVE), LONGEST_MOVE);
    strengths[g] = Math.min(Math.max(strengths[g] * Math.exp(move), SOFTEST * scale), STIFFEST * scale);
    largest = Math.max(largest, Math.abs(change) * Math.min(1, free));
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

/** Σ_b s_b − S_λ θ. */
function penalizedScore(
  scores: Float64Array,
  groups: readonly PenaltyGroup[],
  strengths: Float64Array,
  pull: Pull,
  parameters: Float64Array,
): Float64Array {
  const gradient = new Float64Array(parameters.length);
  for (let i = 0; i < scores.length; i++) gradient[i % gradient.length] += scores[i];
  for (let i = 0; i < gradient.length; i++)
    gradient[i] -= pull.precision[i] * (parameters[i] - pull.centre[i]);
  groups.forEach(({ offsets, functionCount: k, roughness }, g) => {
    for (const offset of offsets) {
      for (let i = 0; i < k; i++) {
        let sum = 0;
        for (let j = 0; j < k; j++) sum += roughness[i * k + j] * parameters[offset + j];
        gradient[offset + i] -= strengths[g] * sum;
      }
    }
  });
  return gradient;
}

function penaltyOf(
  groups: readonly PenaltyGroup[],
  strengths: Float64Array,
  pull: Pull,
  parameters: Float64Array,
): number {
  let total = 0;
  for (let i = 0; i < parameters.length; i++)
    total += pull.precision[i] * (parameters[i] - pull.centre[i]) ** 2;
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

/** I + S_λ + ridge. */
function factorSystem(
  information: Float64Array,
  groups: readonly PenaltyGroup[],
  strengths: Float64Array,
  pull: Pull,
  order: Int32Array,
): PositiveFactor {
  const p = order.length;
  const system = information.slice();
  for (let i = 0; i < p; i++) system[i * p + i] += pull.precision[i];
  const typical = Float64Array.from({ length: p }, (_, i) => information[i * p + i]);
  for (const group of groups) {
    const scale = scaleOf(information, p, group);
    for (const offset of group.offsets) typical.fill(scale, offset, offset + group.functionCount);
  }
  for (let i = 0; i < p; i++) system[i * p + i] += RIDGE * Math.max(typical[i], 1e-300);
  groups.forEach(({ offsets, functionCount: k, roughness }, g) => {
    for (const offset of offsets) {
      for (let i = 0; i < k; i++) {
        const row = (offset + i) * p + offset;
        for (let j = 0; j < k; j++) system[row + j] += strengths[g] * roughness[i * k + j];
      }
    }
  });
  const factor = factorPositive(system, p, order);
  if (!factor) {
    throw new NumericalError(
      'the likelihood has no curvature in some direction: the data do not tell the functions apart; use fewer functions (a smaller spline:N) or constant',
    );
  }
  return factor;
}

/** Sum of products: of two vectors, or the trace of the product of two symmetric matrices. */
function innerProduct(first: Float64Array, second: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < first.length; i++) sum += first[i] * second[i];
  return sum;
}
