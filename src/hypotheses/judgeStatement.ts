/** The verdict on a statement: nested levels of detail, one p-value, parameters with intervals. */

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
  /** p-value of the statement, corrected for the levels. */
  readonly p: number;
  /** The fit at the most detailed level. */
  readonly fit: StatementFit;
  readonly problem: StatementProblem;
}

const DETAIL = [1, 2, 3, 5] as const; // modes beyond those the parameters need, from smooth to fine; finer ones live at the edges
const BLOCKS_PER_COMPARISON = 5; // fewer and the covariance is known too badly to weigh by

/**
 * Judges a statement.
 *
 * @param seed  of the simulated law of the smallest p-value
 */
export function judgeStatement(
  statement: Statement,
  contrasts: Contrasts,
  nodes: Float64Array,
  modes: OccupancyModes,
  seed: number,
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
  const levels = fits.map(({ problem, fit }): Level => {
    const between = countComparisons(problem) - parameters;
    const judged = judgeHotelling(fit.statistic, between, freedom);
    return { modes: problem.modeCount, distance: fit.statistic, between, ...judged };
  });
  const strongest = levels.reduce((best, level) => (level.p < best.p ? level : best));
  const sizes = levels.map(({ between }) => between);
  return {
    levels,
    strongest,
    p: correctForLevels(sizes, freedom, strongest.p, seed),
    ...fits[fits.length - 1],
  };
}
