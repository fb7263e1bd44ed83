/** The coefficients at a place, written to the tape together with the basis functions they came from. */

import type { FieldSlot, LikelihoodLayout } from './layout.js';
import { createTape, type Tape } from './tape.js';

/** What reading coefficients works on. */
export interface CoefficientReader {
  readonly layout: LikelihoodLayout;
  readonly tape: Tape;
  /** Length d: where to read, length. */
  readonly place: Float64Array;
  readonly derivativeValues: Float64Array;
  readonly derivativeIndices: Int32Array;
}

export function createReader(layout: LikelihoodLayout): CoefficientReader {
  const support = Math.max(1, ...layout.bases.map((basis) => basis.support));
  return {
    layout,
    tape: createTape(layout),
    place: new Float64Array(layout.dimensions),
    derivativeValues: new Float64Array(support),
    derivativeIndices: new Int32Array(support),
  };
}

/** Evaluates every field at `place` into the tape: force and its own slope, friction, noise, and the basis values. */
export function readCoefficients(state: CoefficientReader, parameters: Float64Array, node: number): void {
  const { layout, tape } = state;
  const d = layout.dimensions;
  readForce(state, parameters, node);
  const { friction, noise } = layout;
  const at = node * d;
  if (friction && friction.basis >= 0) readPositive(state, parameters, friction, tape.friction, at);
  readPositive(state, parameters, noise, tape.noise, at);
  for (let axis = 0; axis < d; axis++) readSlopes(state, parameters, at, axis);
}

/** Evaluates the bases at `place` into the tape, and the force. */
export function readForce(state: CoefficientReader, parameters: Float64Array, node: number): void {
  const { layout, tape, place } = state;
  const d = layout.dimensions;
  for (let b = 0; b < layout.bases.length; b++) {
    const count = layout.bases[b].evaluateInto(place, 0, tape.scratchIndices[b], tape.scratchValues[b]);
    const { support } = layout.bases[b];
    if (count < support) tape.scratchValues[b].fill(0, count);
    const base = node * support;
    const indices = tape.indices[b];
    const values = tape.values[b];
    for (let i = 0; i < support; i++) {
      indices[base + i] = tape.scratchIndices[b][i];
      values[base + i] = tape.scratchValues[b][i];
    }
  }
  const { force } = layout;
  const at = node * d;
  if (force.basis >= 0) {
    const { support } = layout.bases[force.basis];
    const indices = tape.scratchIndices[force.basis];
    const values = tape.scratchValues[force.basis];
    for (let axis = 0; axis < d; axis++) {
      const offset = force.offset + axis * force.functionCount;
      let sum = 0;
      for (let i = 0; i < support; i++) sum += parameters[offset + indices[i]] * values[i];
      tape.force[at + axis] = sum;
    }
  }
}

/** Writes the weighted sums of all components of a field at a node, before their link. */
export function sumComponents(
  { layout, tape }: CoefficientReader,
  parameters: Float64Array,
  slot: FieldSlot,
  node: number,
  out: Float64Array,
): void {
  if (slot.basis < 0) return;
  const { support } = layout.bases[slot.basis];
  weighComponents(
    parameters,
    slot,
    tape.indices[slot.basis],
    tape.values[slot.basis],
    node * support,
    support,
    out,
  );
}

/** Writes force and weighted sums of the noise's components at `place` moved along an axis. */
export function probe(
  { layout, place, derivativeIndices, derivativeValues }: CoefficientReader,
  parameters: Float64Array,
  axis: number,
  shift: number,
  force: Float64Array,
  noiseSums: Float64Array,
): void {
  const centre = place[axis];
  place[axis] = centre + shift;
  const shared = layout.force.basis === layout.noise.basis;
  let count = layout.bases[layout.noise.basis].evaluateInto(place, 0, derivativeIndices, derivativeValues);
  weighComponents(parameters, layout.noise, derivativeIndices, derivativeValues, 0, count, noiseSums);
  if (layout.force.basis >= 0) {
    if (!shared)
      count = layout.bases[layout.force.basis].evaluateInto(place, 0, derivativeIndices, derivativeValues);
    weighComponents(parameters, layout.force, derivativeIndices, derivativeValues, 0, count, force);
  }
  place[axis] = centre;
}

/** Writes the derivatives of the weighted sums along an axis, at `place`. */
export function sumSlopes(
  { layout, place, derivativeIndices, derivativeValues }: CoefficientReader,
  parameters: Float64Array,
  slot: FieldSlot,
  axis: number,
  out: Float64Array,
): void {
  const basis = layout.bases[slot.basis];
  const count = basis.differentiateInto(place, 0, axis, derivativeIndices, derivativeValues);
  weighComponents(parameters, slot, derivativeIndices, derivativeValues, 0, count, out);
}

/** Writes the weighted sum of each component, from `count` basis functions that start at `from`. */
export function weighComponents(
  parameters: Float64Array,
  slot: FieldSlot,
  indices: Int32Array,
  values: Float64Array,
  from: number,
  count: number,
  out: Float64Array,
): void {
  for (let component = 0; component < slot.components; component++) {
    const offset = slot.offset + component * slot.functionCount;
    let sum = 0;
    for (let i = from; i < from + count; i++) sum += parameters[offset + indices[i]] * values[i];
    out[component] = sum;
  }
}

/** Derivatives of force (with a minus) and friction along their own axis. */
function readSlopes(state: CoefficientReader, parameters: Float64Array, at: number, axis: number): void {
  const { layout, tape, place, derivativeIndices, derivativeValues } = state;
  const { force, friction } = layout;
  let differentiated = -1;
  let count = 0;
  if (force.basis >= 0 && layout.bases[force.basis].spec.kind !== 'constant') {
    count = layout.bases[force.basis].differentiateInto(place, 0, axis, derivativeIndices, derivativeValues);
    differentiated = force.basis;
    const offset = force.offset + axis * force.functionCount;
    let sum = 0;
    for (let i = 0; i < count; i++) sum -= parameters[offset + derivativeIndices[i]] * derivativeValues[i];
    tape.slope[at + axis] = sum;
  }
  if (!friction || friction.basis < 0 || layout.bases[friction.basis].spec.kind === 'constant') return;
  if (friction.basis !== differentiated)
    count = layout.bases[friction.basis].differentiateInto(
      place,
      0,
      axis,
      derivativeIndices,
      derivativeValues,
    );
  const component = friction.components === layout.dimensions ? axis : 0;
  const offset = friction.offset + component * friction.functionCount;
  let sum = 0;
  for (let i = 0; i < count; i++) sum += parameters[offset + derivativeIndices[i]] * derivativeValues[i];
  tape.frictionSlope[at + axis] = sum * tape.friction[at + axis];
}

/** exp of a weighted sum, per axis or the same on all. */
function readPositive(
  state: CoefficientReader,
  parameters: Float64Array,
  slot: LikelihoodLayout['noise'],
  out: Float64Array,
  at: number,
): void {
  const { layout, tape } = state;
  const indices = tape.scratchIndices[slot.basis];
  const values = tape.scratchValues[slot.basis];
  const { support } = layout.bases[slot.basis];
  const d = layout.dimensions;
  for (let component = 0; component < slot.components; component++) {
    const offset = slot.offset + component * slot.functionCount;
    let sum = 0;
    for (let i = 0; i < support; i++) sum += parameters[offset + indices[i]] * values[i];
    const value = Math.exp(sum);
    if (slot.components === d) out[at + component] = value;
    else for (let axis = 0; axis < d; axis++) out[at + axis] = value;
  }
}
