/**
 * Weighted sums of the functions of one basis, read with their slopes at very many places for weights that change from
 * one pass over the data to the next; and, for the way back, the functions that were not zero there.
 */

import type { Basis, BasisSpec } from './Basis.js';
import { fillWeights, SPLINE_DEGREE } from './basis/splineBasis.js';
import { type CellLocator, createCellLocator, interpolate, NODES } from './splineCells.js';

/** One sum: where its k weights start among the parameters, and the axes along which its slope is wanted. */
export interface SumSpec {
  readonly offset: number;
  readonly slopeAxes: readonly number[];
}

export interface SumReader {
  /** One per sum: what `read` or `readValues` found last. */
  readonly values: Float64Array;
  /** Shape (sums, d): what `read` found last, 1/length; zero where none is wanted. */
  readonly slopes: Float64Array;
  /** One per sum, to be added to before `spread`: the derivative of something along the sum. */
  readonly scores: Float64Array;
  /** Length `support`: functions and their values at the node recalled last. */
  readonly indices: Int32Array;
  readonly weights: Float64Array;
  /** Takes new weights; goes before everything else. */
  prepare(parameters: Float64Array): void;
  /** Values and slopes at a place. */
  read(place: Float64Array): void;
  /** Values alone. */
  readValues(place: Float64Array): void;
  /** Notes the place read last by `read` under a number; the numbers are used again from track to track. */
  keep(node: number): void;
  /** Brings the functions of a noted place into `indices` and `weights`. */
  recall(node: number): void;
  /** Adds `scores` at the node recalled last, chained to the weights of the sums, from `out[from]` on; clears them. */
  spread(out: Float64Array, from: number): void;
}

type SplineSpec = Extract<BasisSpec, { kind: 'spline' }>;

/** More numbers than this would not stay in the cache. */
const LARGEST_TABLE = 1_000_000;

export function createSumReader(basis: Basis, sums: readonly SumSpec[]): SumReader {
  const { spec } = basis;
  return (
    (spec.kind === 'spline' ? createCellReader(basis, spec, sums) : null) ?? createPlainReader(basis, sums)
  );
}

/** Reads through the functions of the basis, whatever they are. */
function createPlainReader(basis: Basis, sums: readonly SumSpec[]): SumReader {
  const { dimensions: d, support } = basis;
  const indices = new Int32Array(support);
  const weights = new Float64Array(support);
  const ownIndices = new Int32Array(support);
  const ownValues = new Float64Array(support);
  const values = new Float64Array(sums.length);
  const slopes = new Float64Array(sums.length * d);
  let given = new Float64Array(0);
  const scores = new Float64Array(sums.length);
  const offsets = Int32Array.from(sums, ({ offset }) => offset);
  let nodeIndices = new Int32Array(0);
  let nodeValues = new Float64Array(0);
  const sumUp = (offset: number, count: number): number => {
    let sum = 0;
    for (let i = 0; i < count; i++) sum += given[offset + ownIndices[i]] * ownValues[i];
    return sum;
  };
  const readValues = (place: Float64Array): void => {
    const count = basis.evaluateInto(place, 0, ownIndices, ownValues);
    if (count < support) ownValues.fill(0, count);
    for (let sum = 0; sum < sums.length; sum++) values[sum] = sumUp(sums[sum].offset, count);
  };
  const bends = basis.spec.kind !== 'constant';
  return {
    values,
    slopes,
    scores,
    indices,
    weights,
    prepare(parameters) {
      given = parameters as Float64Array<ArrayBuffer>;
    },
    read(place) {
      for (let axis = 0; bends && axis < d; axis++) {
        if (!sums.some(({ slopeAxes }) => slopeAxes.includes(axis))) continue;
        const count = basis.differentiateInto(place, 0, axis, ownIndices, ownValues);
        for (let sum = 0; sum < sums.length; sum++) {
          if (sums[sum].slopeAxes.includes(axis)) slopes[sum * d + axis] = sumUp(sums[sum].offset, count);
        }
      }
      readValues(place);
    },
    readValues,
    keep(node) {
      const base = node * support;
      if (base + support > nodeIndices.length) {
        const size = Math.max(256 * support, 2 * (base + support));
        nodeIndices = lengthen(nodeIndices, new Int32Array(size));
        nodeValues = lengthen(nodeValues, new Float64Array(size));
      }
      nodeIndices.set(ownIndices, base);
      nodeValues.set(ownValues, base);
    },
    recall(node) {
      for (let i = 0, at = node * support; i < support; i++, at++) {
        indices[i] = nodeIndices[at];
        weights[i] = nodeValues[at];
      }
    },
    spread: (out, from) => spreadScores(scores, offsets, indices, weights, out, from),
  };
}

/**
 * Reads cubics per cell, made anew from every set of weights: uniform B-splines look the same from every cell.
 *
 * @returns null where cells differ (fewer functions along an axis than a cell carries) or are too many
 */
function createCellReader(basis: Basis, spec: SplineSpec, sums: readonly SumSpec[]): SumReader | null {
  const { dimensions: d, support } = basis;
  const degree = spec.degree ?? SPLINE_DEGREE;
  const cells = spec.counts.map((count, axis) => (spec.periods[axis] > 0 ? count : count - degree));
  const perSum = 4 ** d;
  const perCell = sums.length * perSum;
  const cellCount = cells.reduce((product, count) => product * count, 1);
  if (spec.counts.some((count) => count <= degree) || cellCount * perCell > LARGEST_TABLE) return null;
  const widths = cells.map((count, axis) => (spec.high[axis] - spec.low[axis]) / count);
  const cellIndices = listFunctions(basis, spec, cells, widths);
  const powers = powersOfFunctions(degree, d);
  const offsets = Int32Array.from(sums, ({ offset }) => offset);
  const table = new Float64Array(cellCount * perCell);
  const locator = createCellLocator(spec, cells, widths);
  const { local } = locator;
  const values = new Float64Array(sums.length);
  const slopes = new Float64Array(sums.length * d);
  const wanted = Uint8Array.from(
    sums.flatMap(({ slopeAxes }) => widths.map((_, axis) => Number(slopeAxes.includes(axis)))),
  );
  const evaluate = [createLineCubics, createPlaneCubics, createSpaceCubics][d - 1](
    table,
    locator,
    widths,
    wanted,
    values,
    slopes,
  );
  const indices = new Int32Array(support);
  const weights = new Float64Array(support);
  const own = Array.from({ length: d }, () => new Float64Array(degree + 1));
  const scores = new Float64Array(sums.length);
  let cell = 0;
  let nodeCells = new Int32Array(0);
  let nodePlaces = new Float64Array(0);
  return {
    values,
    slopes,
    scores,
    indices,
    weights,
    prepare(parameters) {
      let at = 0;
      for (let base = 0; base < cellIndices.length; base += support) {
        for (let sum = 0; sum < offsets.length; sum++) {
          for (let power = 0; power < perSum; power++, at++) {
            let total = 0;
            for (let i = 0; i < support; i++)
              total += powers[power * support + i] * parameters[offsets[sum] + cellIndices[base + i]];
            table[at] = total;
          }
        }
      }
    },
    read(place) {
      cell = locator.find(place);
      evaluate(cell * perCell, true);
    },
    readValues(place) {
      evaluate(locator.find(place) * perCell, false);
    },
    keep(node) {
      if (node >= nodeCells.length) {
        const nodes = Math.max(256, 2 * node);
        nodeCells = lengthen(nodeCells, new Int32Array(nodes));
        nodePlaces = lengthen(nodePlaces, new Float64Array(nodes * d));
      }
      nodeCells[node] = cell;
      for (let axis = 0; axis < d; axis++) nodePlaces[node * d + axis] = local[axis];
    },
    recall(node) {
      const base = nodeCells[node] * support;
      for (let i = 0; i < support; i++) indices[i] = cellIndices[base + i];
      if (d === 1) {
        fillWeights(degree, nodePlaces[node], weights);
        return;
      }
      for (let axis = 0; axis < d; axis++) fillWeights(degree, nodePlaces[node * d + axis], own[axis]);
      multiplyOut(own, weights);
    },
    spread: (out, from) => spreadScores(scores, offsets, indices, weights, out, from),
  };
}

function spreadScores(
  scores: Float64Array,
  offsets: Int32Array,
  indices: Int32Array,
  weights: Float64Array,
  out: Float64Array,
  from: number,
): void {
  const support = indices.length;
  for (let sum = 0; sum < scores.length; sum++) {
    const score = scores[sum];
    scores[sum] = 0;
    const offset = from + offsets[sum];
    for (let i = 0; i < support; i++) out[offset + indices[i]] += score * weights[i];
  }
}

function lengthen<Numbers extends Int32Array | Float64Array>(from: Numbers, to: Numbers): Numbers {
  to.set(from);
  return to;
}

/** The functions on each cell, shape (cells, support), in the order of the basis. */
function listFunctions(
  basis: Basis,
  spec: SplineSpec,
  cells: readonly number[],
  widths: readonly number[],
): Int32Array {
  const { dimensions: d, support } = basis;
  const cellCount = cells.reduce((product, count) => product * count, 1);
  const all = new Int32Array(cellCount * support);
  const values = new Float64Array(support);
  const centre = new Float64Array(d);
  for (let cell = 0; cell < cellCount; cell++) {
    let rest = cell;
    for (let axis = d - 1; axis >= 0; axis--) {
      centre[axis] = spec.low[axis] + ((rest % cells[axis]) + 0.5) * widths[axis];
      rest = Math.floor(rest / cells[axis]);
    }
    basis.evaluateInto(centre, 0, all.subarray(cell * support, (cell + 1) * support), values);
  }
  return all;
}

/** The functions on a cell as sums of powers of the place in it: shape (4 powers per axis, functions). */
function powersOfFunctions(degree: number, d: number): Float64Array {
  const perAxis = degree + 1;
  const line = new Float64Array(4 * perAxis);
  const weights = new Float64Array(perAxis);
  const column = new Float64Array(4);
  for (let i = 0; i < perAxis; i++) {
    NODES.forEach((node, n) => {
      fillWeights(degree, node, weights);
      column[n] = weights[i];
    });
    interpolate(column, 1);
    for (let power = 0; power < 4; power++) line[power * perAxis + i] = column[power];
  }
  const support = perAxis ** d;
  const out = new Float64Array(4 ** d * support).fill(1);
  for (let at = 0; at < out.length; at++) {
    let power = Math.floor(at / support);
    let i = at % support;
    for (let axis = 0; axis < d; axis++) {
      out[at] *= line[(power % 4) * perAxis + (i % perAxis)];
      power = Math.floor(power / 4);
      i = Math.floor(i / perAxis);
    }
  }
  return out;
}

/** Products of one factor per axis, the last axis fastest. */
function multiplyOut(factors: readonly Float64Array[], out: Float64Array): void {
  out[0] = 1;
  let written = 1;
  for (const factor of factors) {
    const count = factor.length;
    // In place from the back: entry (i, j) goes to i · count + j.
    for (let i = written - 1; i >= 0; i--) {
      const value = out[i];
      for (let j = count - 1; j >= 0; j--) out[i * count + j] = value * factor[j];
    }
    written *= count;
  }
}

/** Evaluates all sums at the place a locator found, from the coefficients that start at `from` in the table. */
type CubicEvaluator = (from: number, withSlopes: boolean) => void;

type CreateCubics = (
  table: Float64Array,
  locator: CellLocator,
  widths: readonly number[],
  wanted: Uint8Array,
  values: Float64Array,
  slopes: Float64Array,
) => CubicEvaluator;

const createLineCubics: CreateCubics = (table, { local, outside }, [width], wanted, values, slopes) => {
  const sums = values.length;
  const scale = 1 / width;
  return (from, withSlopes) => {
    const t = local[0];
    const inside = outside[0] === 1 ? 0 : scale;
    for (let sum = 0, at = from; sum < sums; sum++, at += 4) {
      const b = table[at + 1];
      const c = table[at + 2];
      const e = table[at + 3];
      values[sum] = table[at] + t * (b + t * (c + t * e));
      if (withSlopes && wanted[sum] === 1) slopes[sum] = inside * (b + t * (2 * c + t * 3 * e));
    }
  };
};

const createPlaneCubics: CreateCubics = (table, { local, outside }, widths, wanted, values, slopes) => {
  const sums = values.length;
  const [sScale, tScale] = widths.map((width) => 1 / width);
  return (from, withSlopes) => {
    const s = local[0];
    const t = local[1];
    const sInside = outside[0] === 1 ? 0 : sScale;
    const tInside = outside[1] === 1 ? 0 : tScale;
    for (let sum = 0, at = from; sum < sums; sum++, at += 16) {
      const a = table[at] + t * (table[at + 1] + t * (table[at + 2] + t * table[at + 3]));
      const b = table[at + 4] + t * (table[at + 5] + t * (table[at + 6] + t * table[at + 7]));
      const c = table[at + 8] + t * (table[at + 9] + t * (table[at + 10] + t * table[at + 11]));
      const e = table[at + 12] + t * (table[at + 13] + t * (table[at + 14] + t * table[at + 15]));
      values[sum] = a + s * (b + s * (c + s * e));
      if (!withSlopes) continue;
      if (wanted[2 * sum] === 1) slopes[2 * sum] = sInside * (b + s * (2 * c + s * 3 * e));
      if (wanted[2 * sum + 1] === 0) continue;
      const at0 = table[at + 1] + t * (2 * table[at + 2] + t * 3 * table[at + 3]);
      const at1 = table[at + 5] + t * (2 * table[at + 6] + t * 3 * table[at + 7]);
      const at2 = table[at + 9] + t * (2 * table[at + 10] + t * 3 * table[at + 11]);
      const at3 = table[at + 13] + t * (2 * table[at + 14] + t * 3 * table[at + 15]);
      slopes[2 * sum + 1] = tInside * (at0 + s * (at1 + s * (at2 + s * at3)));
    }
  };
};

const createSpaceCubics: CreateCubics = (table, { local, outside }, widths, wanted, values, slopes) => {
  const sums = values.length;
  const scales = widths.map((width) => 1 / width);
  return (from, withSlopes) => {
    const r = local[0];
    const s = local[1];
    const t = local[2];
    for (let sum = 0, at = from; sum < sums; sum++, at += 64) {
      let [value, alongR, alongS, alongT] = [0, 0, 0, 0];
      for (let i = 3; i >= 0; i--) {
        let [plane, planeS, planeT] = [0, 0, 0];
        for (let j = 3; j >= 0; j--) {
          const k = at + i * 16 + j * 4;
          const row = table[k] + t * (table[k + 1] + t * (table[k + 2] + t * table[k + 3]));
          planeS = planeS * s + plane;
          plane = plane * s + row;
          if (withSlopes) planeT = planeT * s + table[k + 1] + t * (2 * table[k + 2] + t * 3 * table[k + 3]);
        }
        alongR = alongR * r + value;
        value = value * r + plane;
        alongS = alongS * r + planeS;
        alongT = alongT * r + planeT;
      }
      values[sum] = value;
      if (!withSlopes) continue;
      if (wanted[3 * sum] === 1) slopes[3 * sum] = outside[0] === 1 ? 0 : alongR * scales[0];
      if (wanted[3 * sum + 1] === 1) slopes[3 * sum + 1] = outside[1] === 1 ? 0 : alongS * scales[1];
      if (wanted[3 * sum + 2] === 1) slopes[3 * sum + 2] = outside[2] === 1 ? 0 : alongT * scales[2];
    }
  };
};
