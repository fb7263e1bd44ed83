/** Wrapped coordinates made continuous. */

/**
 * Unwraps the periodic axes in place: where a coordinate jumps by more than half a period from one position of a
 * track to the next, whole periods are taken off it and all that follows. Gaps make no difference.
 *
 * The first position of each track stays as recorded, and so do tracks that never jump.
 *
 * @param positions  shape (n, d), length; changed in place
 * @param trackOffsets  length m + 1
 * @param periods  length d, 0 where the axis is open
 */
export function unwrapInto(
  positions: Float64Array,
  trackOffsets: Int32Array,
  periods: readonly number[],
): void {
  const dimensions = periods.length;
  for (let axis = 0; axis < dimensions; axis++) {
    const period = periods[axis];
    if (period === 0) continue;
    for (let track = 0; track + 1 < trackOffsets.length; track++) {
      let turns = 0; // whole periods to add
      let previous = positions[trackOffsets[track] * dimensions + axis];
      for (let row = trackOffsets[track] + 1; row < trackOffsets[track + 1]; row++) {
        const place = row * dimensions + axis;
        const recorded = positions[place];
        const jump = recorded - previous;
        if (Math.abs(jump) > period / 2) turns -= Math.round(jump / period);
        if (turns !== 0) positions[place] = recorded + turns * period;
        previous = recorded;
      }
    }
  }
}
