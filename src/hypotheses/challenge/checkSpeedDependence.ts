/**
 * Speed-dependent friction: whether fast particles are braked more, or less, than in proportion to their velocity.
 *
 * Sums of z_k·v |v|/u and z_k·v (|v|/u)² with v the velocity seen before the step and u its root mean square: if
 * friction is Γ(q) these vanish, once what a change of Γ would do (∝ v) is taken off.
 */

import type { Finding, Skipped } from './Finding.js';
import type { Innovations } from './innovations.js';
import { measurePastVelocities, chooseSpan, rootMeanSquare } from './pastVelocities.js';
import { testSums } from './scoreTest.js';

export function checkSpeedDependence(
  innovations: Innovations,
  relaxationTime: number | null,
): Finding | Skipped {
  const { order, values, tracks } = innovations;
  if (order === 'first') {
    return {
      name: 'speed-dependent-friction',
      reason: 'at first order velocities are not resolved, so friction cannot be compared with speed',
    };
  }
  const d = tracks.dimensions;
  const velocities = measurePastVelocities(innovations, chooseSpan(innovations, relaxationTime));
  const unit = rootMeanSquare(velocities) * Math.sqrt(d);
  const n = values.length / d;
  const products = new Float64Array(n * 3).fill(Number.NaN);
  const squares = new Float64Array(3); // Σ v², Σ v²|v|, Σ v⁴ in units of u, for the size of the effect
  for (let row = 0; row < n; row++) {
    let along = 0;
    let speed = 0;
    for (let axis = 0; axis < d; axis++) {
      const velocity = velocities[row * d + axis] / unit;
      along += values[row * d + axis] * velocity;
      speed += velocity * velocity;
    }
    if (along !== along) continue;
    speed = Math.sqrt(speed);
    products[row * 3] = along;
    products[row * 3 + 1] = along * speed;
    products[row * 3 + 2] = along * speed * speed;
    squares[0] += speed * speed;
    squares[1] += speed ** 3;
    squares[2] += speed ** 4;
  }
  const shape = new Float64Array(n * 2);
  for (let row = 0; row < n; row++) {
    shape[row * 2] = products[row * 3 + 1];
    shape[row * 2 + 1] = products[row * 3 + 2];
  }
  const test = testSums(innovations, shape, 2);
  const friction = testSums(
    innovations,
    products.filter((_, i) => i % 3 === 0),
    1,
  );
  // Correlation of the step's error with v|v| beyond v.
  const beyond = squares[2] - squares[1] ** 2 / squares[0];
  const correlation = test.sums[0] / Math.sqrt(n * Math.max(beyond, Number.MIN_VALUE));
  void friction;
  return {
    name: 'speed-dependent-friction',
    assumption: 'friction depends on place alone, not on speed',
    statistic: test.f,
    p: test.p,
    effect: {
      name: 'correlation of prediction errors with velocity × speed',
      value: correlation,
      error: Math.abs(test.errors[0] / Math.sqrt(n * Math.max(beyond, Number.MIN_VALUE))),
    },
    found:
      test.sums[0] < 0
        ? 'fast particles are braked more than in proportion to their velocity'
        : 'fast particles are braked less than in proportion to their velocity',
    advice:
      'the fitted friction is an average over the speeds that occurred: it will not carry over to other speeds; restrict statements to the recorded range, or fit slow and fast stretches apart',
  };
}
