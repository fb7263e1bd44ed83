/**
 * Splines up to degree 3 as one cubic per cell: what integrators and passes over the data evaluate millions of times a
 * second.
 */

import { SPLINE_DEGREE } from './basis/splineBasis.js';
import type { Basis, BasisSpec } from './Basis.js';

type SplineSpec = Extract<BasisSpec, { kind: 'spline' }>;

/** Evaluates several weighted sums of functions at one place, writing them from `out[outOffset]` on. */
export type SumEvaluator = (place: Float64Array, out: Float64Array, outOffset: number) => void;

/** More numbers than this would not stay in the cache; the basis is then evaluated directly. */
const MAX_CELL_COEFFICIENTS = 2_000_000;

/** Places of a cell whose values determine a cubic. */
export const NODES = [0, 1 / 3, 2 / 3, 1];
/** Coefficients of 1, t, t², t³ from the values at the four nodes (inverse Vandermonde matrix, exact). */
const FROM_NODES = [
  [1, 0, 0, 0],
  [-5.5, 9, -4.5, 1],
  [9, -22.5, 18, -4.5],
  [-4.5, 13.5, -13.5, 4.5],
];

/**
 * Compiles weighted sums of tensor B-splines. Inside a cell of the knot grid each sum is at most cubic per axis, so
 * its values at 4 points per axis determine it exactly (up to rounding).
 *
 * @param weights  one array of k weights per sum
 * @returns null where the grid is too large to be worth it
 */
export function compileSplineCells(
  basis: Basis,
  spec: SplineSpec,
  weights: readonly (readonly number[])[],
): SumEvaluator | null {
  const tabulated = tabulateSplineCells(basis, spec, weights);
  if (tabulated === null) return null;
  const { cells, widths, table } = tabulated;
  return createEvaluator(basis.dimensions, weights.length, spec, cells, widths, table);
}

/**
 * Compiles the slope of each sum along its own axis: sum a is differentiated along axis a. Outside the box of an open
 * axis fields are held, so the slope along it is zero there.
 *
 * @param weights  d arrays of k weights
 * @returns null where the grid is too large to be worth it
 */
export function compileOwnSlopeCells(
  basis: Basis,
  spec: SplineSpec,
  weights: readonly (readonly number[])[],
): SumEvaluator | null {
  const tabulated = tabulateSplineCells(basis, spec, weights);
  if (tabulated === null) return null;
  const d = basis.dimensions;
  const { cells, widths, table } = tabulated;
  const slopes = new Float64Array(table.length);
  const perSum = 4 ** d;
  for (let at = 0; at < table.length; at++) {
    const axis = Math.floor(at / perSum) % d;
    const stride = 4 ** (d - 1 - axis);
    const power = Math.floor(at / stride) % 4;
    if (power > 0) slopes[at - stride] = (power * table[at]) / widths[axis];
  }
  const evaluate = createEvaluator(d, d, spec, cells, widths, slopes);
  return (place, out, outOffset) => {
    evaluate(place, out, outOffset);
    for (let axis = 0; axis < d; axis++) {
      if (spec.periods[axis] > 0) continue;
      if (place[axis] < spec.low[axis] || place[axis] > spec.high[axis]) out[outOffset + axis] = 0;
    }
  };
}

/** Polynomials per cell: shape (cells of the first axis, …, sums, 4 powers per axis), with the layout of the cells. */
export interface SplineTable {
  readonly cells: readonly number[];
  readonly widths: readonly number[];
  readonly table: Float64Array;
}

/** The table behind `compileSplineCells`; null where it would be too large. */
export function tabulateSplineCells(
  basis: Basis,
  spec: SplineSpec,
  weights: readonly (readonly number[])[],
): SplineTable | null {
  const d = basis.dimensions;
  const degree = spec.degree ?? SPLINE_DEGREE;
  const cells = spec.counts.map((count, axis) => (spec.periods[axis] > 0 ? count : count - degree));
  if (cells.some((count) => count < 1)) return null;
  const cellCount = cells.reduce((product, count) => product * count, 1);
  const perSum = 4 ** d;
  const sums = weights.length;
  if (cellCount * perSum * sums > MAX_CELL_COEFFICIENTS) return null;

  const widths = cells.map((count, axis) => (spec.high[axis] - spec.low[axis]) / count);
  const table = new Float64Array(cellCount * sums * perSum);
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const place = new Float64Array(d);
  const samples = new Float64Array(sums * perSum);
  for (let cell = 0; cell < cellCount; cell++) {
    for (let node = 0; node < perSum; node++) {
      let restCell = cell;
      let restNode = node;
      for (let axis = d - 1; axis >= 0; axis--) {
        place[axis] = spec.low[axis] + ((restCell % cells[axis]) + NODES[restNode % 4]) * widths[axis];
        restCell = Math.floor(restCell / cells[axis]);
        restNode = Math.floor(restNode / 4);
      }
      const count = basis.evaluateInto(place, 0, indices, values);
      for (let sum = 0; sum < sums; sum++) {
        let value = 0;
        for (let i = 0; i < count; i++) value += weights[sum][indices[i]] * values[i];
        samples[sum * perSum + node] = value;
      }
    }
    for (let sum = 0; sum < sums; sum++) {
      interpolate(samples.subarray(sum * perSum, (sum + 1) * perSum), d);
    }
    table.set(samples, cell * sums * perSum);
  }
  return { cells, widths, table };
}

/** Turns values at the nodes, shape (4 per axis), into coefficients of powers of t, axis by axis, in place. */
export function interpolate(values: Float64Array, d: number): void {
  const column = new Float64Array(4);
  for (let axis = 0; axis < d; axis++) {
    const stride = 4 ** (d - 1 - axis);
    for (let start = 0; start < values.length; start++) {
      if (Math.floor(start / stride) % 4 !== 0) continue;
      for (let i = 0; i < 4; i++) column[i] = values[start + i * stride];
      for (let i = 0; i < 4; i++) {
        const row = FROM_NODES[i];
        values[start + i * stride] =
          row[0] * column[0] + row[1] * column[1] + row[2] * column[2] + row[3] * column[3];
      }
    }
  }
}

/** Finds the cell of a place, and where in the cell it is. */
export interface CellLocator {
  /** Length 3: place inside the cell found last, in [0, 1] per axis. */
  readonly local: Float64Array;
  /** Length 3: whether the place found last was moved to an edge of the box. */
  readonly outside: Uint8Array;
  /** Number of the cell; the first axis is the slowest. */
  find(place: Float64Array): number;
}

export function createCellLocator(
  spec: SplineSpec,
  cells: readonly number[],
  widths: readonly number[],
): CellLocator {
  const d = cells.length;
  const scale = Float64Array.from(widths, (width) => 1 / width);
  const low = Float64Array.from(spec.low);
  const counts = Int32Array.from(cells);
  const wraps = Uint8Array.from(spec.periods, (period) => (period > 0 ? 1 : 0));
  const local = new Float64Array(3);
  const outside = new Uint8Array(3);
  return {
    local,
    outside,
    find(place) {
      let cell = 0;
      for (let axis = 0; axis < d; axis++) {
        const count = counts[axis];
        let u = (place[axis] - low[axis]) * scale[axis];
        let moved = 0;
        if (wraps[axis] === 1) {
          if (u < 0 || u >= count) u -= Math.floor(u / count) * count;
        } else if (u < 0) {
          u = 0;
          moved = 1;
        } else if (u > count) {
          u = count;
          moved = 1;
        }
        let index = u | 0;
        if (index >= count) index = count - 1;
        local[axis] = u - index;
        outside[axis] = moved;
        cell = cell * count + index;
      }
      return cell;
    },
  };
}

function createEvaluator(
  d: number,
  sums: number,
  spec: SplineSpec,
  cells: readonly number[],
  widths: readonly number[],
  table: Float64Array,
): SumEvaluator {
  const { local, find: locate } = createCellLocator(spec, cells, widths);

  if (d === 1) {
    return (place, out, outOffset) => {
      let at = locate(place) * sums * 4;
      const t = local[0];
      for (let sum = 0; sum < sums; sum++, at += 4) {
        out[outOffset + sum] = table[at] + t * (table[at + 1] + t * (table[at + 2] + t * table[at + 3]));
      }
    };
  }
  if (d === 2) {
    return (place, out, outOffset) => {
      let at = locate(place) * sums * 16;
      const s = local[0];
      const t = local[1];
      for (let sum = 0; sum < sums; sum++, at += 16) {
        const a = table[at] + t * (table[at + 1] + t * (table[at + 2] + t * table[at + 3]));
        const b = table[at + 4] + t * (table[at + 5] + t * (table[at + 6] + t * table[at + 7]));
        const c = table[at + 8] + t * (table[at + 9] + t * (table[at + 10] + t * table[at + 11]));
        const e = table[at + 12] + t * (table[at + 13] + t * (table[at + 14] + t * table[at + 15]));
        out[outOffset + sum] = a + s * (b + s * (c + s * e));
      }
    };
  }
  return (place, out, outOffset) => {
    let at = locate(place) * sums * 64;
    const [r, s, t] = local;
    for (let sum = 0; sum < sums; sum++, at += 64) {
      let total = 0;
      for (let i = 3; i >= 0; i--) {
        let row = 0;
        for (let j = 3; j >= 0; j--) {
          const k = at + i * 16 + j * 4;
          row = row * s + table[k] + t * (table[k + 1] + t * (table[k + 2] + t * table[k + 3]));
        }
        total = total * r + row;
      }
      out[outOffset + sum] = total;
    }
  };
}
