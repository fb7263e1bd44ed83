import { readFileSync } from 'node:fs';
import { MultivariateLinearRegression } from 'ml-regression';
import { describe, expect, it } from 'vitest';
import { NumericalError, UsageError } from '../../src/errors.js';
import { solveLeastSquares } from '../../src/numerics/linear/leastSquares.js';
import { fitStraightLine } from '../../src/numerics/linear/plainRegression.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { createBasis } from '../../src/fields/createBasis.js';
import { LONGLEY } from '../support/longley.js';

// NIST Statistical Reference Datasets, linear regression: Norris (lower difficulty) and Longley (higher; Longley, An
// appraisal of least squares programs for the electronic computer, J. Am. Stat. Assoc. 62 (1967) 819). Data and
// certified values are from memory; a slip in either could not give agreement to this many digits.
const NORRIS: readonly (readonly [number, number])[] = [
  [0.1, 0.2],
  [338.8, 337.4],
  [118.1, 118.2],
  [888.0, 884.6],
  [9.2, 10.1],
  [228.1, 226.5],
  [668.5, 666.3],
  [998.5, 996.3],
  [449.1, 448.6],
  [778.9, 777.0],
  [559.2, 558.2],
  [0.3, 0.4],
  [0.1, 0.6],
  [778.1, 775.5],
  [668.8, 666.9],
  [339.3, 338.0],
  [448.9, 447.5],
  [10.8, 11.6],
  [557.7, 556.0],
  [228.3, 228.1],
  [998.0, 995.8],
  [888.8, 887.6],
  [119.6, 120.2],
  [0.3, 0.3],
  [0.6, 0.3],
  [557.6, 556.8],
  [339.3, 339.1],
  [888.0, 887.2],
  [998.5, 999.0],
  [778.9, 779.0],
  [10.2, 11.1],
  [117.6, 118.3],
  [228.9, 229.2],
  [668.4, 669.1],
  [449.2, 448.9],
  [0.2, 0.5],
]; // y, x

interface CertifiedCase {
  readonly degree: number;
  readonly x: number[];
  readonly y: number[];
  readonly coefficients: number[];
  readonly standardErrors: number[];
  readonly residualDeviation: number;
}

/** Filip and Wampler 1 to 5, solved in exact rational arithmetic by test/reference/polynomials/make.py. */
const POLYNOMIALS = JSON.parse(
  readFileSync(new URL('../reference/polynomials/certified.json', import.meta.url), 'utf8'),
) as Record<string, CertifiedCase>;

/** Rows of the powers 0 to `degree` of each place. */
function powersOf(places: readonly number[], degree: number): Float64Array {
  return Float64Array.from(places.flatMap((x) => Array.from({ length: degree + 1 }, (_, n) => x ** n)));
}

/** Coefficients of powers of x from those of powers of (x − centre)/scale. */
function expandPowers(coefficients: Float64Array, centre: number, scale: number): number[] {
  const out = new Array<number>(coefficients.length).fill(0);
  coefficients.forEach((coefficient, n) => {
    let choose = 1; // n over j
    for (let j = n; j >= 0; j--) {
      out[j] += (coefficient * choose * (-centre) ** (n - j)) / scale ** n;
      choose = (choose * j) / (n - j + 1);
    }
  });
  return out;
}

/** Rows of explanatory variables with an intercept in front. */
function withIntercept(rows: readonly (readonly number[])[]): Float64Array {
  return Float64Array.from(rows.flatMap((row) => [1, ...row]));
}

/** Digits two numbers share: −log10 of the relative difference, the measure NIST uses. */
function commonDigits(found: number, certified: number): number {
  return -Math.log10(Math.max(Math.abs(found / certified - 1), 1e-16));
}

function fewestDigits(found: ArrayLike<number>, certified: readonly number[]): number {
  return Math.min(...certified.map((value, i) => commonDigits(found[i], value)));
}

describe('least squares', () => {
  it('reproduces the certified values of Norris (NIST StRD, from memory) to twelve digits', () => {
    const fit = solveLeastSquares(
      withIntercept(NORRIS.map(([, x]) => [x])),
      Float64Array.from(NORRIS, ([y]) => y),
    );
    expect(fewestDigits(fit.coefficients, [-0.262323073774029, 1.00211681802045])).toBeGreaterThan(12);
    expect(fewestDigits(fit.standardErrors, [0.232818234301152, 0.429796848199937e-3])).toBeGreaterThan(12);
    expect(commonDigits(fit.residualDeviation, 0.884796396144373)).toBeGreaterThan(12);
    expect(commonDigits(fit.determination, 0.999993745883712)).toBeGreaterThan(14);
    expect(fit.freedom).toBe(34);
  });

  it('reproduces the certified values of Longley (NIST StRD, from memory) to eight digits and more', () => {
    const fit = solveLeastSquares(
      withIntercept(LONGLEY.map((row) => row.slice(1))),
      Float64Array.from(LONGLEY, (row) => row[0]),
    );
    expect(
      fewestDigits(
        fit.coefficients,
        [
          -3482258.63459582, 15.0618722713733, -0.35819179292591e-1, -2.02022980381683, -1.03322686717359,
          -0.511041056535807e-1, 1829.15146461355,
        ],
      ),
    ).toBeGreaterThan(10);
    expect(
      fewestDigits(
        fit.standardErrors,
        [
          890420.383607373, 84.9149257747669, 0.334910077722432e-1, 0.488399681651699, 0.214274163161675,
          0.22607320006937, 455.478499142212,
        ],
      ),
    ).toBeGreaterThan(10);
    expect(commonDigits(fit.residualDeviation, 304.854073561965)).toBeGreaterThan(12);
    expect(commonDigits(fit.determination, 0.995479004577296)).toBeGreaterThan(12);
  });

  it.each(['wampler1', 'wampler2', 'wampler3', 'wampler4', 'wampler5'])(
    'reproduces %s (NIST StRD) to thirteen digits, however large the residuals',
    (name) => {
      const { degree, x, y, coefficients, standardErrors, residualDeviation } = POLYNOMIALS[name];
      const fit = solveLeastSquares(powersOf(x, degree), Float64Array.from(y));
      expect(fewestDigits(fit.coefficients, coefficients)).toBeGreaterThan(13);
      if (residualDeviation === 0) {
        expect(fit.residualDeviation).toBeLessThan(1e-14);
      } else {
        expect(fewestDigits(fit.standardErrors, standardErrors)).toBeGreaterThan(13);
        expect(commonDigits(fit.residualDeviation, residualDeviation)).toBeGreaterThan(13);
      }
    },
  );

  it('reproduces Filip (NIST StRD, degree 10) to twelve digits on the polynomials of a model', () => {
    const { degree, x, y, coefficients, standardErrors, residualDeviation } = POLYNOMIALS.filip;
    const [centre, scale] = [-6, 2.75];
    const basis = createBasis({ kind: 'polynomial', degree, centre: [centre], scale: [scale] }, 1);
    const design = new Float64Array(x.length * basis.functionCount);
    const indices = new Int32Array(basis.support);
    x.forEach((_, row) => basis.evaluateInto(x, row, indices, design.subarray(row * basis.functionCount)));
    const fit = solveLeastSquares(design, Float64Array.from(y));
    expect(fewestDigits(expandPowers(fit.coefficients, centre, scale), coefficients)).toBeGreaterThan(12);
    expect(commonDigits(fit.residualDeviation, residualDeviation)).toBeGreaterThan(12);
    expect(
      commonDigits(fit.standardErrors[degree] / scale ** degree, standardErrors[degree]),
    ).toBeGreaterThan(12);
    expect(fit.conditioning).toBeLessThan(1e4);
  });

  it('says how little bare powers leave of Filip', () => {
    // No design in double precision holds more than 7.6 digits of this case: the powers are rounded themselves.
    const { degree, x, y, coefficients } = POLYNOMIALS.filip;
    const fit = solveLeastSquares(powersOf(x, degree), Float64Array.from(y));
    expect(fewestDigits(fit.coefficients, coefficients)).toBeGreaterThan(7);
    expect(fit.conditioning).toBeGreaterThan(1e8);
    expect(fit.conditioning).toBeLessThan(1e12);
  });

  it('agrees with an independent library of regressions on random designs', () => {
    const stream = randomStream(3, 'random designs');
    for (let study = 0; study < 5; study++) {
      const rows = Array.from({ length: 40 }, () => [stream.normal(), stream.normal() + 3, stream.uniform()]);
      const response = rows.map(([a, b, c]) => 1 + 2 * a - 0.5 * b + 3 * c + 0.2 * stream.normal());
      const fit = solveLeastSquares(withIntercept(rows), Float64Array.from(response));
      const library = new MultivariateLinearRegression(
        rows,
        response.map((y) => [y]),
      );
      const [a, b, c, intercept] = library.weights.map(([weight]) => weight);
      expect(fewestDigits(fit.coefficients, [intercept, a, b, c])).toBeGreaterThan(10);
      const [errorA, errorB, errorC, errorIntercept] = library.stdErrors;
      expect(fewestDigits(fit.standardErrors, [errorIntercept, errorA, errorB, errorC])).toBeGreaterThan(10);
      expect(commonDigits(fit.residualDeviation, library.stdError)).toBeGreaterThan(10);
    }
  });

  it('reproduces an autoregression fitted by numpy (test/reference/regression)', () => {
    const reference = JSON.parse(
      readFileSync(new URL('../reference/regression/autoregression.json', import.meta.url), 'utf8'),
    ) as {
      series: number[];
      coefficients: number[];
      standardErrors: number[];
      residualDeviation: number;
      determination: number;
    };
    const earlier = reference.series.slice(0, -1).map((value) => [value]);
    const fit = solveLeastSquares(withIntercept(earlier), Float64Array.from(reference.series.slice(1)));
    expect(fewestDigits(fit.coefficients, reference.coefficients)).toBeGreaterThan(12);
    expect(fewestDigits(fit.standardErrors, reference.standardErrors)).toBeGreaterThan(12);
    expect(commonDigits(fit.residualDeviation, reference.residualDeviation)).toBeGreaterThan(12);
    expect(commonDigits(fit.determination, reference.determination)).toBeGreaterThan(12);
  });

  it('does not mind the units of the columns', () => {
    const rows = LONGLEY.map((row) => row.slice(1));
    const response = Float64Array.from(LONGLEY, (row) => row[0]);
    const plain = solveLeastSquares(withIntercept(rows), response);
    const factors = [1, 1e9, 1e-12, 1e3, 1e-6, 1, 1e7];
    const scaled = withIntercept(rows).map((value, i) => value * factors[i % 7]);
    const moved = solveLeastSquares(scaled, response);
    const back = moved.coefficients.map((value, j) => value * factors[j]);
    expect(fewestDigits(back, Array.from(plain.coefficients))).toBeGreaterThan(10);
  });

  it('says which column is to blame where columns say the same, and what to do', () => {
    const rows = [1, 2, 3, 4, 5].map((x) => [x, x * x, 3 * x * x - 2 * x + 7]);
    const solve = () => solveLeastSquares(withIntercept(rows), Float64Array.of(1, 2, 3, 4, 9));
    expect(solve).toThrow(NumericalError);
    expect(solve).toThrow(/column 4 of 4 .* combination of the columns before it; leave it out/);
    const empty = () => solveLeastSquares(Float64Array.of(1, 0, 1, 0, 1, 0), Float64Array.of(1, 2, 3));
    expect(empty).toThrow(/column 2 of 2/);
  });

  it('refuses designs that do not belong to the response', () => {
    expect(() => solveLeastSquares(new Float64Array(7), new Float64Array(3))).toThrow(UsageError);
    expect(() => solveLeastSquares(new Float64Array(8), new Float64Array(2))).toThrow(/2 rows/);
    expect(() => solveLeastSquares(new Float64Array(0), new Float64Array(0))).toThrow(UsageError);
  });

  it('has no standard errors where every row is used up', () => {
    const fit = solveLeastSquares(Float64Array.of(1, 0, 1, 2), Float64Array.of(3, 7));
    expect(fit.coefficients[0]).toBeCloseTo(3, 12);
    expect(fit.coefficients[1]).toBeCloseTo(2, 12);
    expect(Array.from(fit.standardErrors)).toEqual([NaN, NaN]);
  });
});

describe('a straight line', () => {
  it('is the same from the library of regressions as from our least squares', () => {
    const line = fitStraightLine(
      NORRIS.map(([, x]) => x),
      NORRIS.map(([y]) => y),
    );
    expect(commonDigits(line.slope, 1.00211681802045)).toBeGreaterThan(11);
    expect(commonDigits(line.intercept, -0.262323073774029)).toBeGreaterThan(9);
  });

  it('needs two points at different places', () => {
    expect(() => fitStraightLine([1], [2])).toThrow(UsageError);
    expect(() => fitStraightLine([1, 2], [2])).toThrow(UsageError);
    expect(() => fitStraightLine([4, 4, 4], [1, 2, 3])).toThrow(/all are at 4/);
  });
});
