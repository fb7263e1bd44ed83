/** The coefficients at a place, written to the tape; and on the way back the functions they came from. */

import { createSumReader, type SumReader, type SumSpec } from '../../fields/sumReader.js';
import type { FieldSlot, LikelihoodLayout } from './layout.js';
import { createTape, FORCE, FRICTION, FRICTION_SLOPE, NOISE, RECORD_SIZE, SLOPE, type Tape } from './tape.js';

/** A field as its basis reads it: component c is sum `first` + c. */
export interface FieldReading {
  readonly slot: FieldSlot;
  readonly reader: SumReader;
  readonly first: number;
}

/** Where scores of a field along axis a are added: entry `first` + a · `step`. */
export interface ScoreTarget {
  readonly values: Float64Array;
  readonly first: number;
  readonly step: number;
}

/** What reading coefficients works on. */
export interface CoefficientReader {
  readonly layout: LikelihoodLayout;
  readonly tape: Tape;
  /** Length d: where to read, length. */
  readonly place: Float64Array;
  /** One per distinct basis in use. */
  readonly readers: readonly SumReader[];
  /** Null for fields that are zero by the plan. */
  readonly force: FieldReading | null;
  readonly friction: FieldReading | null;
  readonly noise: FieldReading;
  readonly targets: {
    readonly force: ScoreTarget;
    readonly friction: ScoreTarget;
    readonly noise: ScoreTarget;
  };
}

/** @param allSlopes  whether the slopes of force and friction are wanted along all axes, or each along its own */
export function createReader(layout: LikelihoodLayout, allSlopes = false): CoefficientReader {
  const d = layout.dimensions;
  const axes = Array.from({ length: d }, (_, axis) => axis);
  const sums: SumSpec[][] = layout.bases.map(() => []);
  const firstOf = (slot: FieldSlot | null, bends: boolean): number => {
    if (!slot || slot.basis < 0) return 0;
    const own = sums[slot.basis];
    const first = own.length;
    for (let component = 0; component < slot.components; component++) {
      const everywhere = allSlopes || slot.components !== d;
      own.push({
        offset: slot.offset + component * slot.functionCount,
        slopeAxes: bends ? (everywhere ? axes : [component]) : [],
      });
    }
    return first;
  };
  const firsts = [firstOf(layout.force, true), firstOf(layout.friction, true), firstOf(layout.noise, false)];
  const readers = layout.bases.map((basis, b) =>
    sums[b].length > 0 ? createSumReader(basis, sums[b]) : null,
  );
  const reading = (slot: FieldSlot | null, first: number): FieldReading | null => {
    const reader = slot && slot.basis >= 0 ? readers[slot.basis] : null;
    return slot && reader && { slot, reader, first };
  };
  const force = reading(layout.force, firsts[0]);
  const friction = reading(layout.friction, firsts[1]);
  const noise = reading(layout.noise, firsts[2]) as FieldReading; // noise is always fitted
  const target = (field: FieldReading | null): ScoreTarget =>
    field
      ? { values: field.reader.scores, first: field.first, step: field.slot.components === 1 ? 0 : 1 }
      : { values: new Float64Array(d), first: 0, step: 1 }; // read by nobody
  return {
    layout,
    tape: createTape(layout),
    place: new Float64Array(d),
    readers: readers.filter((reader) => reader !== null),
    force,
    friction,
    noise,
    targets: { force: target(force), friction: target(friction), noise: target(noise) },
  };
}

/** Takes new parameters; goes before all reading. */
export function prepareReader({ readers }: CoefficientReader, parameters: Float64Array): void {
  for (const reader of readers) reader.prepare(parameters);
}

/** Evaluates every field at `place`: force and its own slope, friction, noise; onto the records of a node. */
export function readCoefficients(state: CoefficientReader, node: number): void {
  const { tape, force, friction, noise } = state;
  const { records, dimensions: d } = tape;
  readNode(state, node);
  let gamma = 0;
  let spread = 0;
  for (let axis = 0; axis < d; axis++) {
    const at = (node * d + axis) * RECORD_SIZE;
    records[at + FORCE] = force === null ? 0 : force.reader.values[force.first + axis];
    records[at + SLOPE] = force === null ? 0 : -force.reader.slopes[(force.first + axis) * d + axis];
    if (friction !== null) {
      const { reader, slot } = friction;
      const sum = friction.first + (slot.components === 1 ? 0 : axis);
      if (axis === 0 || slot.components > 1) gamma = Math.exp(reader.values[sum]);
      records[at + FRICTION] = gamma;
      records[at + FRICTION_SLOPE] = gamma * reader.slopes[sum * d + axis];
    }
    if (axis === 0 || noise.slot.components > 1) spread = Math.exp(noise.reader.values[noise.first + axis]);
    records[at + NOISE] = spread;
  }
}

/** Reads all bases at `place` and keeps what is needed to recall it. */
export function readNode({ readers, place }: CoefficientReader, node: number): void {
  for (let i = 0; i < readers.length; i++) {
    readers[i].read(place);
    readers[i].keep(node);
  }
}

/** Brings back the functions that were not zero at a node; goes before spreading its scores. */
export function recallNode({ readers }: CoefficientReader, node: number): void {
  for (let i = 0; i < readers.length; i++) readers[i].recall(node);
}

/** Chains the scores of the node recalled to its functions; adds them to those of a block. */
export function spreadScores({ readers }: CoefficientReader, scores: Float64Array, block: number): void {
  for (let i = 0; i < readers.length; i++) readers[i].spread(scores, block);
}

/** Copies the weighted sums of all components of a field, read last, before their link. */
export function copySums(field: FieldReading | null, out: Float64Array): void {
  if (!field) return;
  const { slot, reader, first } = field;
  for (let component = 0; component < slot.components; component++)
    out[component] = reader.values[first + component];
}

/** Copies their derivatives along an axis. */
export function copySlopes(field: FieldReading, axis: number, dimensions: number, out: Float64Array): void {
  const { slot, reader, first } = field;
  for (let component = 0; component < slot.components; component++)
    out[component] = reader.slopes[(first + component) * dimensions + axis];
}

/** Writes force and weighted sums of the noise's components at `place` moved along an axis. */
export function probe(
  { place, readers, force, noise }: CoefficientReader,
  axis: number,
  shift: number,
  forceOut: Float64Array,
  noiseSums: Float64Array,
): void {
  const centre = place[axis];
  place[axis] = centre + shift;
  for (let i = 0; i < readers.length; i++) readers[i].readValues(place);
  copySums(force, forceOut);
  copySums(noise, noiseSums);
  place[axis] = centre;
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
