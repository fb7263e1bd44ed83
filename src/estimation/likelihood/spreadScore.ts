import type { FieldSlot, LikelihoodLayout } from './layout.js';
import type { Tape } from './tape.js';

/** Chains the score of a field's values to the few basis functions that are not zero there. */
export function spreadScore(
  layout: LikelihoodLayout,
  tape: Tape,
  node: number,
  slot: FieldSlot,
  perAxis: Float64Array,
  scores: Float64Array,
  block: number,
): void {
  if (slot.basis < 0) return;
  const d = layout.dimensions;
  const { support } = layout.bases[slot.basis];
  const indices = tape.indices[slot.basis];
  const values = tape.values[slot.basis];
  const base = node * support;
  for (let component = 0; component < slot.components; component++) {
    let score = perAxis[component];
    if (slot.components !== d) for (let axis = 1; axis < d; axis++) score += perAxis[axis];
    const offset = block + slot.offset + component * slot.functionCount;
    for (let i = 0; i < support; i++) scores[offset + indices[base + i]] += score * values[base + i];
  }
}
