import type { FieldSlot, LikelihoodLayout } from './layout.js';
import type { Tape } from './tape.js';

/** Chains the score of a field's values along each axis to the few basis functions that are not zero there. */
export function spreadScore(
  layout: LikelihoodLayout,
  tape: Tape,
  node: number,
  slot: FieldSlot,
  perAxis: Float64Array,
  scores: Float64Array,
  block: number,
): void {
  if (slot.components !== layout.dimensions) {
    // One component stands for all axes.
    for (let axis = 1; axis < layout.dimensions; axis++) perAxis[0] += perAxis[axis];
  }
  spreadComponents(layout, tape, node, slot, perAxis, scores, block);
}

/** The same from the scores of the components. */
export function spreadComponents(
  layout: LikelihoodLayout,
  tape: Tape,
  node: number,
  slot: FieldSlot,
  components: Float64Array,
  scores: Float64Array,
  block: number,
): void {
  if (slot.basis < 0) return;
  const { support } = layout.bases[slot.basis];
  const indices = tape.indices[slot.basis];
  const values = tape.values[slot.basis];
  const base = node * support;
  for (let component = 0; component < slot.components; component++) {
    const score = components[component];
    const offset = block + slot.offset + component * slot.functionCount;
    for (let i = 0; i < support; i++) scores[offset + indices[base + i]] += score * values[base + i];
  }
}
