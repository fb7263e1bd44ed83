/**
 * Friction, noise and diffusion as full matrices at a place, their derivatives along an axis, and the way back from
 * slopes along their entries to scores of the components.
 */

import { createSymmetricExponential } from '../../numerics/linear/symmetricExponential.js';
import type { FieldSlot } from './layout.js';

/** A field of positive matrices read at one place; `read` goes before the other two. */
export interface MatrixField {
  readonly slot: FieldSlot;
  /** Writes the matrix, shape (d, d), from the weighted sums of the components. */
  read(sums: Float64Array, out: Float64Array): void;
  /** Writes the derivative of the matrix from the derivatives of the weighted sums. */
  differentiate(sums: Float64Array, out: Float64Array): void;
  /** Writes the scores of the components from the slopes of the log-likelihood along the entries, shape (d, d). */
  score(slopes: Float64Array, out: Float64Array): void;
}

export function createMatrixField(slot: FieldSlot, d: number): MatrixField {
  const { field } = slot;
  if (slot.basis < 0) {
    const nothing = (_from: Float64Array, out: Float64Array): void => void out.fill(0);
    return { slot, read: nothing, differentiate: nothing, score: nothing };
  }
  return field.form === 'matrix' ? createFullField(slot, d) : createDiagonalField(slot, d);
}

function createDiagonalField(slot: FieldSlot, d: number): MatrixField {
  const values = new Float64Array(slot.components);
  const step = slot.components === 1 ? 0 : 1;
  return {
    slot,
    read(sums, out) {
      for (let c = 0; c < values.length; c++) values[c] = Math.exp(sums[c]);
      out.fill(0);
      for (let axis = 0; axis < d; axis++) out[axis * d + axis] = values[axis * step];
    },
    differentiate(sums, out) {
      out.fill(0);
      for (let axis = 0; axis < d; axis++) out[axis * d + axis] = values[axis * step] * sums[axis * step];
    },
    score(slopes, out) {
      out.fill(0);
      for (let axis = 0; axis < d; axis++) out[axis * step] += values[axis * step] * slopes[axis * d + axis];
    },
  };
}

/** exp of the symmetric part of the sums; an antisymmetric part (friction only) is added as it is. */
function createFullField(slot: FieldSlot, d: number): MatrixField {
  const triangular = slot.field.name !== 'friction';
  const exponential = createSymmetricExponential(d);
  const values = new Float64Array(d);
  const vectors = new Float64Array(d * d);
  const symmetric = new Float64Array(d * d);
  const turning = new Float64Array(d * d);
  const part = new Float64Array(d * d);
  const split = (sums: Float64Array): void => {
    let component = 0;
    for (let i = 0; i < d; i++) {
      for (let j = triangular ? i : 0; j < d; j++) {
        part[i * d + j] = sums[component++];
        if (triangular) part[j * d + i] = part[i * d + j];
      }
    }
    for (let i = 0; i < d; i++) {
      for (let j = 0; j < d; j++) {
        symmetric[i * d + j] = (part[i * d + j] + part[j * d + i]) / 2;
        turning[i * d + j] = (part[i * d + j] - part[j * d + i]) / 2;
      }
    }
  };
  return {
    slot,
    read(sums, out) {
      split(sums);
      exponential.decompose(symmetric, values, vectors, out);
      for (let i = 0; i < d * d; i++) out[i] += turning[i];
    },
    differentiate(sums, out) {
      split(sums);
      exponential.differentiate(values, vectors, symmetric, out);
      for (let i = 0; i < d * d; i++) out[i] += turning[i];
    },
    score(slopes, out) {
      for (let i = 0; i < d; i++) {
        for (let j = 0; j < d; j++) {
          symmetric[i * d + j] = (slopes[i * d + j] + slopes[j * d + i]) / 2;
          turning[i * d + j] = (slopes[i * d + j] - slopes[j * d + i]) / 2;
        }
      }
      exponential.differentiate(values, vectors, symmetric, part);
      let component = 0;
      for (let i = 0; i < d; i++) {
        for (let j = triangular ? i : 0; j < d; j++) {
          const twice = triangular && i !== j ? 2 : 1;
          out[component++] = twice * part[i * d + j] + turning[i * d + j];
        }
      }
    },
  };
}
