import type { TrackSet } from '../../tracks/TrackSet.js';

/** Mean squared step (length²) and secant velocity (length²/time²) along each axis; one where nothing moves. */
export function measureMotion({ dimensions: d, positions, times, trackOffsets }: TrackSet): {
  steps: Float64Array;
  velocities: Float64Array;
} {
  const steps = new Float64Array(d);
  const velocities = new Float64Array(d);
  let count = 0;
  for (let track = 0; track < trackOffsets.length - 1; track++) {
    for (let row = trackOffsets[track] + 1; row < trackOffsets[track + 1]; row++) {
      count++;
      for (let axis = 0; axis < d; axis++) {
        const step = positions[row * d + axis] - positions[(row - 1) * d + axis];
        steps[axis] += step * step;
        velocities[axis] += (step / (times[row] - times[row - 1])) ** 2;
      }
    }
  }
  const average = (sum: number): number => (sum > 0 ? sum / count : 1);
  return { steps: steps.map(average), velocities: velocities.map(average) };
}
