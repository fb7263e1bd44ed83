/**
 * Several laws for the same coefficient, compared by how well each predicts data its parameters were not fitted to.
 *
 * Blocks are dealt into folds. Without fold f the contrasts are, to first order, c − B/(B − n_f) Σ_f effect, and from
 * fold f alone c + B/n_f Σ_f effect. Each law is fitted to the former and scored on the latter by the Gaussian log
 * density −½ hᵀ (C B/n_f)⁻¹ h (the common constant left out). Differences between laws are taken fold by fold, so that
 * their error is that of paired data.
 *
 * Source  cross-validation: Stone, J. R. Stat. Soc. B 36 (1974) 111; criterion T² + 2r: Andrews, Consistent moment
 *         selection procedures, Econometrica 67 (1999) 543.
 */

import { studentQuantile } from '../numerics/special/student.js';
import { meanOf } from '../numerics/statistics/meanOf.js';
import type { Contrasts } from './contrasts.js';
import { createResiduals, fitStatement, type StatementProblem } from './fitStatement.js';
import { solveLowerInPlace } from '../numerics/linear/choleskyFactor.js';

const FOLDS = 10;
const NO_ODDS = 2; // a useless parameter costs ½ to 1 of score; odds below e² to 1 are no ground to call a law worse

export interface ScoredLaw {
  readonly score: number;
  readonly scoreError: number;
  readonly difference: number;
  readonly differenceError: number;
  readonly tie: boolean;
  /** T² of the law on all data at the common level of detail, + 2 × its parameters. */
  readonly criterion: number;
}

/**
 * Scores the laws.
 *
 * @param problems  one per law, all on the same contrasts and modes
 * @param confidence  level at which a difference no longer counts as a tie
 * @returns in the order of the laws
 */
export function compareLaws(problems: readonly StatementProblem[], confidence: number): ScoredLaw[] {
  const [{ contrasts }] = problems;
  const folds = Math.min(FOLDS, contrasts.blocks);
  const whole = problems.map((problem) => fitStatement(problem));
  const scores = problems.map((problem, law) =>
    Float64Array.from({ length: folds }, (_, fold) => scoreFold(problem, whole[law].parameters, fold, folds)),
  );
  const totals = scores.map((row) => meanOf(row) * folds);
  const best = totals.indexOf(Math.max(...totals));
  const t = studentQuantile((1 + confidence) / 2, Math.max(1, folds - 1));
  return problems.map((problem, law) => {
    const differences = scores[law].map((score, fold) => score - scores[best][fold]);
    const differenceError = errorOfSum(differences);
    const difference = totals[law] - totals[best];
    return {
      score: totals[law],
      scoreError: errorOfSum(scores[law]),
      difference,
      differenceError,
      tie: law !== best && Math.abs(difference) <= Math.max(NO_ODDS, t * differenceError),
      criterion: whole[law].statistic + 2 * problem.statement.parameterNames.length,
    };
  });
}

function scoreFold(problem: StatementProblem, start: Float64Array, fold: number, folds: number): number {
  const { contrasts } = problem;
  const members = Array.from({ length: contrasts.blocks }, (_, block) => block).filter(
    (block) => block % folds === fold,
  );
  const share = members.length / contrasts.blocks;
  const training = moveContrasts(contrasts, members, -1 / (1 - share));
  const held = moveContrasts(contrasts, members, 1 / share);
  const { parameters } = fitStatement({ ...problem, contrasts: training }, [start]);
  const { values, lower } = createResiduals({ ...problem, contrasts: held })(parameters);
  if (lower === null) return -Infinity;
  const whitened = values.slice();
  solveLowerInPlace(lower, whitened.length, whitened);
  let squares = 0;
  for (let i = 0; i < whitened.length; i++) squares += whitened[i] ** 2;
  return -0.5 * share * squares;
}

function moveContrasts(contrasts: Contrasts, members: readonly number[], weight: number): Contrasts {
  const size = contrasts.values.length;
  const values = contrasts.values.slice();
  for (const block of members) {
    for (let i = 0; i < size; i++) values[i] += weight * contrasts.effects[block * size + i];
  }
  return { ...contrasts, values };
}

/** Standard error of a sum of independent terms, from their scatter. */
function errorOfSum(terms: Float64Array): number {
  const mean = meanOf(terms);
  let squares = 0;
  for (let i = 0; i < terms.length; i++) squares += (terms[i] - mean) ** 2;
  return Math.sqrt((squares * terms.length) / Math.max(1, terms.length - 1));
}
