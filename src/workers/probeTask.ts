/** A task without a purpose of its own: it lets the tests see that work reaches the workers and comes back in order. */

import type { Task } from '../numerics/MapTasks.js';

export const probeTask: Task<{ offset: number }, Float64Array, number> = {
  name: 'sum-of-squares',
  run({ offset }, values) {
    let sum = offset;
    for (let i = 0; i < values.length; i++) sum += values[i] * values[i];
    return sum;
  },
};
