/**
 * Points to start the search for a law's parameters from, when the user gives none: sizes met in the data (of the
 * column, of the visited region) in many combinations, with the parameters that enter linearly set to their best.
 */

import {
  factorCholeskyInto,
  solveLowerInPlace,
  solveUpperInPlace,
} from '../numerics/linear/choleskyFactor.js';
import { randomStream, type RandomStream } from '../numerics/random/RandomStream.js';
import { meanOf } from '../numerics/statistics/meanOf.js';
import { freeParameters, type Law, type LawEvaluator } from './lawStatement.js';

const COMBINATIONS = 400;
const SEED = 0; // the starts are part of the method, not of the study
const ROWS = 200; // nodes the linear parameters are set by

/**
 * @param evaluate  the law's values given its free parameters
 * @param columns  K columns at the nodes
 * @param nodes  shape (m, d)
 * @returns points of the free parameters; those given in `law.start` keep the value given
 */
export function proposeStarts(
  law: Law,
  evaluate: LawEvaluator,
  columns: readonly Float64Array[],
  nodes: Float64Array,
  d: number,
): Float64Array[] {
  const names = freeParameters(law);
  if (names.length === 0) return [new Float64Array(0)];
  const given = names.map((name): number | null => law.start[name] ?? null);
  if (given.every((value) => value !== null)) return [Float64Array.from(given, Number)];
  const { places, response } = thin(columns, nodes, d);
  const sizes = listSizes(response, places, d);
  const stream = randomStream(SEED, 'starts of a law');
  const linear = findLinear(evaluate, names, given, places, response.length, stream);
  const starts: Float64Array[] = [];
  const trials = names.length === linear.length ? 1 : COMBINATIONS;
  for (let trial = 0; trial < trials; trial++) {
    const start = Float64Array.from(given, (value) => value ?? sizes[stream.integer(sizes.length)]);
    if (setLinear(evaluate, linear, start, places, response)) starts.push(start);
  }
  return starts;
}

/** A few hundred nodes and the mean of the columns there. */
function thin(
  columns: readonly Float64Array[],
  nodes: Float64Array,
  d: number,
): { places: Float64Array; response: Float64Array } {
  const m = nodes.length / d;
  const rows = Math.min(m, ROWS);
  const places = new Float64Array(rows * d);
  const response = new Float64Array(rows);
  for (let row = 0; row < rows; row++) {
    const node = Math.floor(((row + 0.5) * m) / rows);
    places.set(nodes.subarray(node * d, node * d + d), row * d);
    for (const column of columns) response[row] += column[node] / columns.length;
  }
  return { places, response };
}

/** Numbers a parameter may be like: pure numbers, sizes of the column, places and lengths of the visited region. */
function listSizes(response: Float64Array, places: Float64Array, d: number): number[] {
  const level = meanOf(response);
  const spread = deviationOf(response);
  const sizes = [0, 1, -1, 0.3, -0.3, 0.1, 3, level, spread, -spread, level + spread, level - spread];
  for (let axis = 0; axis < d; axis++) {
    const along = Float64Array.from({ length: places.length / d }, (_, row) => places[row * d + axis]).sort();
    const middle = meanOf(along);
    const width = deviationOf(along);
    sizes.push(middle, middle + width, middle - width, along[0], along[along.length - 1]);
    sizes.push(width, width / 3, width / 10, 3 * width, 1 / width, 3 / width, 0.3 / width);
    sizes.push(level / width, spread / width, level / (width * width));
  }
  return sizes.filter(Number.isFinite);
}

function deviationOf(values: Float64Array): number {
  const mean = meanOf(values);
  let squares = 0;
  for (let i = 0; i < values.length; i++) squares += (values[i] - mean) ** 2;
  return Math.sqrt(squares / Math.max(1, values.length - 1));
}

/**
 * Free parameters that enter linearly together, found by trying: the law moves by equal amounts when one of them takes
 * equal steps, wherever the others stand.
 */
function findLinear(
  evaluate: LawEvaluator,
  names: readonly string[],
  given: readonly (number | null)[],
  places: Float64Array,
  rows: number,
  stream: RandomStream,
): number[] {
  const value = (point: Float64Array): Float64Array => {
    const out = new Float64Array(rows);
    evaluate(point, places, out);
    return out;
  };
  const linear: number[] = [];
  const isJointlyLinear = (candidate: number): boolean => {
    for (let trial = 0; trial < 3; trial++) {
      const base = Float64Array.from(names, () => 0.5 + stream.uniform());
      for (const other of [...linear, candidate]) {
        // mixed second differences along the candidate and every linear parameter, itself included
        const moved = (a: number, b: number): Float64Array => {
          const point = base.slice();
          point[candidate] += a;
          point[other] += b;
          return value(point);
        };
        const [both, one, two, none] = [moved(0.7, 0.4), moved(0.7, 0), moved(0, 0.4), moved(0, 0)];
        for (let row = 0; row < rows; row++) {
          const size = Math.abs(both[row]) + Math.abs(one[row]) + Math.abs(two[row]) + Math.abs(none[row]);
          if (Math.abs(both[row] - one[row] - two[row] + none[row]) > 1e-9 * size) return false;
        }
      }
    }
    return true;
  };
  for (let i = 0; i < names.length; i++) if (given[i] === null && isJointlyLinear(i)) linear.push(i);
  return linear;
}

/** Sets the linear parameters by plain least squares; false where the law has no value or they cannot be told apart. */
function setLinear(
  evaluate: LawEvaluator,
  linear: readonly number[],
  start: Float64Array,
  places: Float64Array,
  response: Float64Array,
): boolean {
  const p = linear.length;
  const rows = response.length;
  const rest = new Float64Array(rows);
  for (const i of linear) start[i] = 0;
  evaluate(start, places, rest);
  if (!rest.every(Number.isFinite)) return false;
  if (p === 0) return true;
  const columns = linear.map((i) => {
    const column = new Float64Array(rows);
    start[i] = 1;
    evaluate(start, places, column);
    start[i] = 0;
    for (let row = 0; row < rows; row++) column[row] -= rest[row];
    return column;
  });
  const normal = new Float64Array(p * p);
  const right = new Float64Array(p);
  for (let i = 0; i < p; i++) {
    for (let row = 0; row < rows; row++) right[i] += columns[i][row] * (response[row] - rest[row]);
    for (let j = 0; j < p; j++) {
      for (let row = 0; row < rows; row++) normal[i * p + j] += columns[i][row] * columns[j][row];
    }
  }
  for (let i = 0; i < p; i++) normal[i * p + i] *= 1 + 1e-9; // parameters that cannot be told apart share the load
  const lower = new Float64Array(p * p);
  if (!factorCholeskyInto(normal, p, lower)) return false;
  solveLowerInPlace(lower, p, right);
  solveUpperInPlace(lower, p, right);
  for (let i = 0; i < p; i++) start[linear[i]] = right[i];
  return right.every(Number.isFinite);
}
