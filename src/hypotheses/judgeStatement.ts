/** How far a statement is from the contrasts, at nested levels of detail. */

import { NumericalError } from '../errors.js';
import type { Contrasts } from './contrasts.js';
import { countComparisons, fitStatement, type StatementFit, type StatementProblem } from './fitStatement.js';
import { correctForLevels, judgeHotelling } from './nestedLevels.js';
import type { OccupancyModes } from './occupancyModes.js';
import type { Statement } from './Statement.js';

export interface Level {
  /** Modes looked at. */
  readonly modes: number;
  /** Hotelling's T². */
  readonly distance: number;
  /** F statistic with its degrees of freedom, and its p-value alone. */
  readonly f: number;
  readonly between: number;
  readonly within: number;
  readonly p: number;
}

export interface Verdict {
  readonly levels: readonly Level[];
  /** The level with the smallest p-value. */
  readonly strongest: Level;
  /** The fit at the most detailed level. */
  readonly fit: StatementFit;
  readonly problem: StatementProblem;
}

const DETAIL = [1, 2, 3, 5] as const; // modes beyond those the parameters need, from smooth to fine; finer ones live at the edges
const BLOCKS_PER_COMPARISON = 5; // fewer and the covariance is known too badly to weigh by

/** Judges a statement at every level the data can carry. */
export function judgeStatement(
  statement: Statement,
  contrasts: Contrasts,
  nodes: Float64Array,
  modes: OccupancyModes,
): Verdict {
  const rows = statement.residualNames.length;
  const parameters = statement.parameterNames.length;
  const freedom = contrasts.blocks - 1;
  const most = Math.max(parameters + 1, Math.floor(contrasts.blocks / BLOCKS_PER_COMPARISON));
  const needed = rows === 0 ? 0 : Math.max(0, Math.ceil((parameters - contrasts.extraCount) / rows));
  const counts = DETAIL.map((extra) => (rows === 0 ? 0 : Math.min(modes.count, needed + extra))).filter(
    (count, i, all) => i === 0 || (count > all[i - 1] && contrasts.extraCount + count * rows <= most),
  );
  const fits = counts.map((modeCount) => {
    const problem = { statement, contrasts, nodes, modes, modeCount };
    return { problem, fit: fitStatement(problem) };
  });
  if (fits.some(({ fit }) => !Number.isFinite(fit.statistic))) {
    throw new NumericalError(
      `the statement about ${statement.residualNames.join(', ') || statement.extraNames.join(', ')} has no value near these data for any parameters tried; give start values with --start, or a formula that is positive where the tracks have been`,
      { residuals: [...statement.residualNames] },
    );
  }
  const levels = fits.map(({ problem, fit }): Level => {
    const between = countComparisons(problem) - parameters;
    const judged = judgeHotelling(fit.statistic, between, freedom);
    return { modes: problem.modeCount, distance: fit.statistic, between, ...judged };
  });
  const strongest = levels.reduce((best, level) => (level.p < best.p ? level : best));
  return {
    levels,
    strongest,
    ...fits[fits.length - 1],
  };
}

/** p-value of a statement by theory: the smallest of the levels', corrected for having looked at all. */
export function computeP({ levels, strongest, problem }: Verdict, seed: number): number {
  const sizes = levels.map(({ between }) => between);
  return correctForLevels(sizes, problem.contrasts.blocks - 1, strongest.p, seed);
}
