/**
 * The minimum distance behind every test, against nested regressions: with the coefficients of a regression as contrasts
 * and their covariance, T² over its degrees of freedom is the F statistic of the nested models.
 */

import { inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import type { Contrasts } from '../../src/hypotheses/contrasts.js';
import { fitStatement, type StatementProblem } from '../../src/hypotheses/fitStatement.js';
import { identity, type Statement } from '../../src/hypotheses/Statement.js';
import { LONGLEY } from '../support/longley.js';
import { solveLeastSquares } from '../../src/numerics/linear/leastSquares.js';

const rows = LONGLEY.length;
const response = Float64Array.from(LONGLEY, ([y]) => y);

/** A design with an intercept and the regressors of the given numbers. */
function designOf(regressors: readonly number[]): Float64Array {
  return Float64Array.from(LONGLEY.flatMap((row) => [1, ...regressors.map((i) => row[i])]));
}

function residualSquares(regressors: readonly number[]): { squares: number; freedom: number } {
  const { residualDeviation, freedom } = solveLeastSquares(designOf(regressors), response);
  return { squares: residualDeviation ** 2 * freedom, freedom };
}

/** Contrasts that are the slopes of the full regression, and the statement that some of them vanish. */
function problemOf(vanishing: readonly number[]): StatementProblem {
  const all = [1, 2, 3, 4, 5, 6];
  const k = all.length;
  const { coefficients, residualDeviation } = solveLeastSquares(designOf(all), response);
  // covariance of the slopes: s² times the inverse of the centred cross products
  const means = all.map((i) => LONGLEY.reduce((sum, row) => sum + row[i], 0) / rows);
  const cross = new Float64Array(k * k);
  for (const row of LONGLEY) {
    for (let i = 0; i < k; i++)
      for (let j = 0; j < k; j++) cross[i * k + j] += (row[all[i]] - means[i]) * (row[all[j]] - means[j]);
  }
  const inverted = inverse(Matrix.from1DArray(k, k, cross));
  const picked = vanishing.map((i) => all.indexOf(i));
  const q = picked.length;
  const covariance = Float64Array.from({ length: q * q }, (_, at) => {
    return residualDeviation ** 2 * inverted.get(picked[Math.floor(at / q)], picked[at % q]);
  });
  const contrasts: Contrasts = {
    columnCount: q,
    modeCount: 1,
    extraCount: 0,
    values: Float64Array.from(picked, (i) => coefficients[i + 1]),
    effects: new Float64Array(0),
    covariance,
    blocks: rows,
    reports: [],
    columnsAtNodes: [],
  };
  const names = vanishing.map(String);
  const statement: Statement = {
    parameterNames: [],
    columnNames: names,
    residualNames: names,
    extraNames: [],
    reportNames: [],
    logarithmic: false,
    columns: () => [],
    extras: () => [],
    reports: () => [],
    combination: () => identity(q),
    target: () => null,
    impose: (model) => model,
    starts: () => [new Float64Array(0)],
  };
  const nodes = new Float64Array(1);
  const modes = { count: 1, atNodes: [Float64Array.of(1)], evaluate: () => [Float64Array.of(1)] };
  return { statement, contrasts, nodes, modes, modeCount: 1 };
}

describe('nested regressions', () => {
  it('give the certified F statistic of the whole Longley regression', () => {
    // NIST Statistical Reference Datasets, Longley, analysis of variance: F(6, 9) = 330.285339234588 (from memory)
    const { statistic, freedom } = fitStatement(problemOf([1, 2, 3, 4, 5, 6]));
    expect(freedom).toBe(6);
    // the slopes' covariance is nearly singular (condition 1e9 after scaling): six digits are left
    expect(statistic / 6 / 330.285339234588 - 1).toBeCloseTo(0, 5);
  });

  it.each([[[1]], [[5]], [[1, 2]], [[3, 4, 6]]])(
    'give F from sums of squares when %j are left out',
    (out) => {
      const full = residualSquares([1, 2, 3, 4, 5, 6]);
      const nested = residualSquares([1, 2, 3, 4, 5, 6].filter((i) => !out.includes(i)));
      const f = (nested.squares - full.squares) / out.length / (full.squares / full.freedom);
      expect(fitStatement(problemOf(out)).statistic / out.length / f - 1).toBeCloseTo(0, 5);
    },
  );
});
