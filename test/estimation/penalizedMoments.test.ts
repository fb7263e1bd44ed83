import { describe, expect, it } from 'vitest';
import { NumericalError } from '../../src/errors.js';
import {
  type MomentBlocks,
  type PenaltyGroup,
  solvePenalizedMoments,
} from '../../src/estimation/penalizedMoments.js';
import type { Basis } from '../../src/fields/Basis.js';
import { createBasis } from '../../src/fields/createBasis.js';
import { solveLeastSquares } from '../../src/numerics/linear/leastSquares.js';
import { type RandomStream, randomStream } from '../../src/numerics/random/RandomStream.js';

interface Rows {
  readonly regressors: number[][];
  readonly instruments: number[][];
  readonly responses: number[];
}

/** Moment blocks of rows dealt round to `blocks` blocks, each row with its weight. */
function momentsOf(rows: Rows, blocks: number, weights: readonly number[] = []): MomentBlocks {
  const p = rows.regressors[0].length;
  const matrices = Array.from({ length: blocks }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: blocks }, () => new Float64Array(p));
  const instrumentGram = new Float64Array(p * p);
  rows.regressors.forEach((regressors, row) => {
    const block = row % blocks;
    const weight = weights[block] ?? 1;
    const instruments = rows.instruments[row];
    for (let i = 0; i < p; i++) {
      vectors[block][i] += weight * instruments[i] * rows.responses[row];
      for (let j = 0; j < p; j++) {
        matrices[block][i * p + j] += weight * instruments[i] * regressors[j];
        instrumentGram[i * p + j] += instruments[i] * instruments[j];
      }
    }
  });
  return { size: p, matrices, vectors, instrumentGram };
}

function drawRows(stream: RandomStream, count: number, truth: readonly number[]): Rows {
  const regressors = Array.from({ length: count }, () =>
    truth.map((_, j) => (j === 0 ? 1 : stream.normal())),
  );
  const responses = regressors.map((row) =>
    row.reduce((sum, x, j) => sum + x * truth[j], 0.5 * stream.normal()),
  );
  return { regressors, instruments: regressors, responses };
}

/** A spline with 12 functions on [0, 1] and rows that follow a function with noise. */
function splineRows(stream: RandomStream, count: number, noise: number, f: (x: number) => number) {
  const basis = createBasis({ kind: 'spline', counts: [12], low: [0], high: [1], periods: [0] }, 1);
  const regressors: number[][] = [];
  const responses: number[] = [];
  for (let row = 0; row < count; row++) {
    const x = stream.uniform();
    regressors.push(valuesAt(basis, x));
    responses.push(f(x) + noise * stream.normal());
  }
  const group: PenaltyGroup = {
    offsets: [0],
    roughness: basis.roughness() as Float64Array,
    functionCount: 12,
  };
  return { basis, rows: { regressors, instruments: regressors, responses }, group };
}

function valuesAt(basis: Basis, x: number): number[] {
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const all = new Array<number>(basis.functionCount).fill(0);
  const written = basis.evaluateInto([x], 0, indices, values);
  for (let i = 0; i < written; i++) all[indices[i]] += values[i];
  return all;
}

describe('moments without a penalty', () => {
  const truth = [2, -1, 0.5, 3];
  const rows = drawRows(randomStream(1, 'rows'), 240, truth);

  it('are ordinary least squares where the matrix is the Gram matrix', () => {
    const solution = solvePenalizedMoments(momentsOf(rows, 8), []);
    const direct = solveLeastSquares(
      Float64Array.from(rows.regressors.flat()),
      Float64Array.from(rows.responses),
    );
    direct.coefficients.forEach((value, i) => expect(solution.parameters[i]).toBeCloseTo(value, 8));
    expect(solution.effectiveParameters).toBeCloseTo(4, 6);
    expect(solution.strengths).toEqual([]);
    expect(solution.smoothingFactor).toBeNull();
  });

  it('are instrumental variables, (ZᵀX)⁻¹ Zᵀy, where instruments differ from regressors', () => {
    const stream = randomStream(2, 'instruments');
    // regressor = instrument + something that also enters the error: least squares is biased, instruments are not
    const mixed: Rows = { regressors: [], instruments: [], responses: [] };
    for (let row = 0; row < 20_000; row++) {
      const [z, shared] = [stream.normal(), stream.normal()];
      mixed.instruments.push([1, z]);
      mixed.regressors.push([1, z + shared]);
      mixed.responses.push(1 + 2 * (z + shared) + 3 * shared + stream.normal());
    }
    const { parameters } = solvePenalizedMoments(momentsOf(mixed, 20), []);
    const centre = (values: number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
    const z = mixed.instruments.map((row) => row[1]);
    const covariance = (values: number[]) =>
      centre(values.map((value, i) => value * z[i])) - centre(values) * centre(z);
    const slope = covariance(mixed.responses) / covariance(mixed.regressors.map((row) => row[1]));
    expect(parameters[1]).toBeCloseTo(slope, 7);
    // standard error √(10/20000) = 0.022
    expect(Math.abs(parameters[1] - 2)).toBeLessThan(4 * 0.0224);
    const naive = solvePenalizedMoments(momentsOf({ ...mixed, instruments: mixed.regressors }, 20), []);
    expect(naive.parameters[1]).toBeGreaterThan(3.3); // 2 + 3/2
  });

  it('have influences that sum to zero and are the derivatives with respect to block weights', () => {
    const blocks = 8;
    const solution = solvePenalizedMoments(momentsOf(rows, blocks), []);
    const step = 1e-4;
    for (let i = 0; i < 4; i++) {
      let sum = 0;
      for (let block = 0; block < blocks; block++) sum += solution.influences[block * 4 + i];
      expect(sum).toBeCloseTo(0, 8);
    }
    for (let block = 0; block < blocks; block++) {
      const weighted = (by: number) =>
        solvePenalizedMoments(
          momentsOf(
            rows,
            blocks,
            Array.from({ length: blocks }, (_, b) => (b === block ? 1 + by : 1)),
          ),
          [],
        ).parameters;
      const [above, below] = [weighted(step), weighted(-step)];
      for (let i = 0; i < 4; i++) {
        expect(solution.influences[block * 4 + i]).toBeCloseTo((above[i] - below[i]) / (2 * step), 5);
      }
    }
  });

  it('have influences whose spread is the standard error of the estimate', () => {
    const many = drawRows(randomStream(3, 'rows'), 6000, truth);
    const { influences } = solvePenalizedMoments(momentsOf(many, 100), []);
    const direct = solveLeastSquares(
      Float64Array.from(many.regressors.flat()),
      Float64Array.from(many.responses),
    );
    for (let i = 0; i < 4; i++) {
      let squares = 0;
      for (let block = 0; block < 100; block++) squares += influences[block * 4 + i] ** 2;
      // relative standard error of a standard deviation from 100 blocks: 1/√200 = 7 %
      expect(Math.abs(Math.sqrt(squares) / direct.standardErrors[i] - 1)).toBeLessThan(4 * 0.071);
    }
  });

  it('move by the bread times a change of the moments', () => {
    const moments = momentsOf(rows, 8);
    const solution = solvePenalizedMoments(moments, []);
    const change = [0.3, -2, 1, 0.7];
    const moved = solvePenalizedMoments(
      {
        ...moments,
        vectors: moments.vectors.map((vector, b) => (b === 3 ? vector.map((v, i) => v + change[i]) : vector)),
      },
      [],
    );
    for (let i = 0; i < 4; i++) {
      const predicted = change.reduce((sum, value, j) => sum + solution.bread[i * 4 + j] * value, 0);
      expect(moved.parameters[i] - solution.parameters[i]).toBeCloseTo(predicted, 9);
    }
  });
});

describe('penalties', () => {
  it('are strong for a straight line and weak for waves the data can see', () => {
    const straight = splineRows(randomStream(5, 'line'), 3000, 0.5, (x) => 1 + 2 * x);
    const line = solvePenalizedMoments(momentsOf(straight.rows, 30), [straight.group]);
    expect(line.strengths[0]).toBeGreaterThanOrEqual(1);
    expect(line.effectiveParameters).toBeLessThan(4); // 2 for a straight line
    expect(line.effectiveParameters).toBeGreaterThan(1.9);
    const wavy = splineRows(randomStream(6, 'wave'), 3000, 0.2, (x) => Math.sin(9 * x));
    const wave = solvePenalizedMoments(momentsOf(wavy.rows, 30), [wavy.group]);
    expect(wave.strengths[0]).toBeLessThanOrEqual(0.01);
    expect(wave.effectiveParameters).toBeGreaterThan(7);
    for (const x of [0.1, 0.35, 0.6, 0.9]) {
      const fitted = valuesAt(wavy.basis, x).reduce((sum, value, i) => sum + value * wave.parameters[i], 0);
      expect(Math.abs(fitted - Math.sin(9 * x))).toBeLessThan(0.1);
    }
  });

  it('lower the error: cross-validated fits are closer to the truth than unpenalised ones', () => {
    const errorOf = (parameters: Float64Array, basis: Basis, f: (x: number) => number) => {
      let squares = 0;
      for (let x = 0.02; x < 1; x += 0.04) {
        const fitted = valuesAt(basis, x).reduce((sum, value, i) => sum + value * parameters[i], 0);
        squares += (fitted - f(x)) ** 2;
      }
      return squares;
    };
    let penalised = 0;
    let plain = 0;
    const f = (x: number) => Math.sin(3 * x);
    for (let seed = 0; seed < 10; seed++) {
      const { rows, group, basis } = splineRows(randomStream(seed, 'error'), 600, 0.5, f);
      penalised += errorOf(solvePenalizedMoments(momentsOf(rows, 20), [group]).parameters, basis, f);
      plain += errorOf(solvePenalizedMoments(momentsOf(rows, 20), []).parameters, basis, f);
    }
    expect(penalised).toBeLessThan(0.7 * plain);
  });

  it('are taken as given where they are known', () => {
    const { rows, group } = splineRows(randomStream(7, 'known'), 500, 0.3, (x) => x * x);
    const moments = momentsOf(rows, 10);
    const strong = solvePenalizedMoments(moments, [group], [1e4]);
    const weak = solvePenalizedMoments(moments, [group], [1e-6]);
    expect([strong.strengths, weak.strengths]).toEqual([[1e4], [1e-6]]);
    expect(strong.effectiveParameters).toBeCloseTo(2, 1);
    expect(weak.effectiveParameters).toBeCloseTo(12, 1);
  });

  it('do not depend on the units of the response or of a group of regressors', () => {
    const { rows, group } = splineRows(randomStream(8, 'units'), 400, 0.3, (x) => Math.cos(4 * x));
    const plain = solvePenalizedMoments(momentsOf(rows, 10), [group]);
    const scaled = rows.regressors.map((row) => row.map((value) => value * 1e6));
    const moved = solvePenalizedMoments(
      momentsOf(
        { regressors: scaled, instruments: scaled, responses: rows.responses.map((y) => 1e-3 * y) },
        10,
      ),
      [group],
    );
    expect(moved.strengths).toEqual(plain.strengths);
    plain.parameters.forEach((value, i) => expect(moved.parameters[i] * 1e9).toBeCloseTo(value, 7));
    expect(moved.conditioning / plain.conditioning).toBeCloseTo(1, 6);
  });

  it('carry a function nobody visited on from its neighbours, in a straight line', () => {
    const { rows, group, basis } = splineRows(randomStream(9, 'gap'), 4000, 0.05, (x) => 1 + x);
    const seen = rows.regressors
      .map((row, i) => ({ row, y: rows.responses[i] }))
      .filter(({ row }) => row[11] === 0);
    const regressors = seen.map(({ row }) => row);
    const { parameters } = solvePenalizedMoments(
      momentsOf({ regressors, instruments: regressors, responses: seen.map(({ y }) => y) }, 20),
      [group],
    );
    const edge = valuesAt(basis, 1).reduce((sum, value, i) => sum + value * parameters[i], 0);
    expect(Math.abs(edge - 2)).toBeLessThan(0.1);
  });
});

describe('moments that hold nothing', () => {
  it('are refused in words', () => {
    const empty: MomentBlocks = {
      size: 2,
      matrices: [new Float64Array(4)],
      vectors: [new Float64Array(2)],
      instrumentGram: new Float64Array(4),
    };
    expect(() => solvePenalizedMoments(empty, [])).toThrow(NumericalError);
    expect(() => solvePenalizedMoments(empty, [])).toThrow(/no usable rows; give longer gap-free tracks/);
  });
});
