/**
 * Carries the correction for the finite interval from effective to true coefficients, knot by knot; of a coefficient
 * that does not vary, the change is averaged over the rows that each knot stands for.
 */

import type { Model } from '../../fields/CoefficientField.js';
import { modelFields } from '../../fields/modelParameters.js';
import {
  correctFirstOrderInto,
  correctSecondOrderInto,
  type LocalCoefficients,
} from '../differences/correctInterval.js';
import {
  gatherChange,
  type IntervalCorrection,
  spreadComponents,
} from '../differences/intervalCorrection.js';
import type { KernelGrid } from './grid.js';

/**
 * Prepares the correction.
 *
 * @param model  template that fixes bases and forms; its bases are the grid's or constant
 * @param zero  per field of the model: whether it is taken as zero and has no raw parameters
 * @param counts  length K: rows each knot stands for
 * @param errorVariance  localization variance per axis, length²
 */
export function createKnotCorrection(
  grid: KernelGrid,
  model: Model,
  zero: readonly boolean[],
  counts: Float64Array,
  errorVariance: ArrayLike<number>,
  interval: number,
): IntervalCorrection {
  const { size, dimensions: d } = grid;
  const fields = modelFields(model);
  const rows = counts.reduce((sum, count) => sum + count, 0);
  const neighbours = findNeighbours(grid);

  /** Values at the knots, one array per component; all zero for a field without raw parameters. */
  const expand = (raw: Float64Array): Float64Array[][] => {
    let at = 0;
    return fields.map((field, index) =>
      field.coefficients.map((component) => {
        const values = new Float64Array(size);
        if (zero[index]) return values;
        if (component.length === 1) values.fill(raw[at]);
        else values.set(raw.subarray(at, at + size));
        at += component.length;
        return values;
      }),
    );
  };

  const correct = (raw: Float64Array): Float64Array => {
    const before = expand(raw);
    const changes = before.map((components) => components.map((values) => values.slice()));
    const force = changes[0];
    const friction = model.order === 'second' ? changes[1] : [];
    const noise = changes[changes.length - 1];
    const noiseForm = fields[fields.length - 1].form;
    const frictionForm = model.order === 'second' ? model.friction.form : 'scalar';
    const local: LocalCoefficients = {
      force: new Float64Array(d),
      friction: new Float64Array(d * d),
      noise: new Float64Array(d * d),
    };
    const slopes = new Float64Array(d);
    for (let knot = 0; knot < size; knot++) {
      for (let axis = 0; axis < d; axis++) {
        const { after, ahead, length } = neighbours[axis];
        local.force[axis] = before[0][axis][knot];
        slopes[axis] = (before[0][axis][after[knot]] - before[0][axis][ahead[knot]]) / length[knot];
      }
      spreadComponents(local.friction, friction, knot, frictionForm, d, false);
      spreadComponents(local.noise, noise, knot, noiseForm, d, true);
      if (model.order === 'second') correctSecondOrderInto(local, slopes, errorVariance, interval);
      else correctFirstOrderInto(local, slopes, errorVariance, interval);
      for (let axis = 0; axis < d; axis++) force[axis][knot] = local.force[axis] - force[axis][knot];
      gatherChange(friction, local.friction, knot, frictionForm, d, false);
      gatherChange(noise, local.noise, knot, noiseForm, d, true);
    }
    const out: number[] = [];
    fields.forEach((field, index) => {
      field.coefficients.forEach((component, c) => {
        const change = changes[index][c];
        const values = before[index][c];
        if (zero[index]) out.push(...component);
        else if (component.length > 1) for (let i = 0; i < size; i++) out.push(values[i] + change[i]);
        else out.push(values[0] + change.reduce((sum, value, i) => sum + value * counts[i], 0) / rows);
      });
    });
    return Float64Array.from(out);
  };
  return { correct };
}

/** The knots on either side along an axis (the knot itself at an open end) and how far apart they are. */
interface Neighbours {
  readonly after: Int32Array;
  readonly ahead: Int32Array;
  readonly length: Float64Array;
}

function findNeighbours(grid: KernelGrid): Neighbours[] {
  const { spec, size, spacing, periods, dimensions: d } = grid;
  if (spec.kind !== 'spline') throw new TypeError('the grid has splines');
  return periods.map((period, axis) => {
    const count = spec.counts[axis];
    let stride = 1;
    for (let other = axis + 1; other < d; other++) stride *= spec.counts[other];
    const after = new Int32Array(size);
    const ahead = new Int32Array(size);
    const length = new Float64Array(size);
    for (let knot = 0; knot < size; knot++) {
      const index = Math.floor(knot / stride) % count;
      const up = period > 0 ? (index + 1) % count : Math.min(index + 1, count - 1);
      const down = period > 0 ? (index + count - 1) % count : Math.max(index - 1, 0);
      after[knot] = knot + (up - index) * stride;
      ahead[knot] = knot + (down - index) * stride;
      length[knot] = spacing[axis] * (period > 0 ? 2 : up - down);
    }
    return { after, ahead, length };
  });
}
