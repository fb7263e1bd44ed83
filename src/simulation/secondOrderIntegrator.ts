/**
 * Second order: dq = v dt, dv = [F(q) − Γ(q) v] dt + σ(q) dW by symmetric splitting,
 *
 *   drift ½h · kick ½h · friction and noise h · kick ½h · drift ½h,
 *
 * with friction and noise solved exactly at the place held fixed (an Ornstein–Uhlenbeck step), and every coefficient
 * read once per step, at the midpoint. Weak order 2; time-reversible, so that without noise and friction energy does
 * not creep.
 *
 * Source  Bussi & Parrinello, Accurate sampling using Langevin dynamics, Phys. Rev. E 75 (2007) 056707;
 *         Leimkuhler & Matthews, Molecular Dynamics (2015), ch. 7 (the scheme called ABOBA there).
 */

import type { RandomStream } from '../numerics/random/RandomStream.js';
import type { Integrator } from './Integrator.js';
import { createMatrixBathStep } from './matrixBathStep.js';
import type { ScenarioEvaluator } from './ScenarioEvaluator.js';
import { reflect, type Walls } from './walls.js';

const SMALL = 1e-6; // of 2Γh: below it the series is exact to rounding

/** Variance per axis that an Ornstein–Uhlenbeck step adds: N (1 − e⁻²ᶠʰ)/(2Γ), with its limit for Γ → 0. */
export function bathVariance(friction: number, noise: number, step: number, decay: number): number {
  const x = 2 * friction * step;
  return x < SMALL ? noise * step * (1 - 0.5 * x) : (noise * (1 - decay * decay)) / (2 * friction);
}

export function createSecondOrderIntegrator(evaluator: ScenarioEvaluator, walls: Walls | null): Integrator {
  return {
    evaluator,
    weakOrder: 2,
    advance:
      evaluator.bathForm === 'matrix' ? advanceMatrix(evaluator, walls) : advanceAxes(evaluator, walls),
  };
}

function advanceAxes(evaluator: ScenarioEvaluator, walls: Walls | null): Integrator['advance'] {
  const { dimensions: d, bathSize, uniformBath } = evaluator;
  const force = new Float64Array(d);
  const friction = new Float64Array(bathSize);
  const noise = new Float64Array(bathSize);
  const decay = new Float64Array(bathSize);
  const spread = new Float64Array(bathSize);
  const bathStride = bathSize === 1 ? 0 : 1;
  let preparedFor = Number.NaN; // the step a uniform bath was last prepared for
  return (position, velocity, count, step, stream) => {
    const half = 0.5 * step;
    for (let axis = 0; axis < d; axis++) position[axis] += half * velocity[axis];
    if (walls !== null) reflect(position, velocity, walls);
    for (let done = 1; done <= count; done++) {
      evaluator.evaluateInto(position, force, friction, noise);
      if (!uniformBath || preparedFor !== step) {
        for (let i = 0; i < bathSize; i++) {
          const kept = Math.exp(-friction[i] * step);
          decay[i] = kept;
          spread[i] = Math.sqrt(bathVariance(friction[i], noise[i], step, kept));
        }
        preparedFor = step;
      }
      const drift = done === count ? half : step; // the half drifts of neighbouring steps are one
      for (let axis = 0; axis < d; axis++) {
        const kick = half * force[axis];
        const bath = axis * bathStride;
        const v = (velocity[axis] + kick) * decay[bath] + spread[bath] * stream.normal() + kick;
        velocity[axis] = v;
        position[axis] += drift * v;
      }
      if (walls !== null) reflect(position, velocity, walls);
    }
  };
}

function advanceMatrix(evaluator: ScenarioEvaluator, walls: Walls | null): Integrator['advance'] {
  const { dimensions: d, bathSize, uniformBath } = evaluator;
  const force = new Float64Array(d);
  const friction = new Float64Array(bathSize);
  const noise = new Float64Array(bathSize);
  const bath = createMatrixBathStep(d);
  let preparedFor = Number.NaN;
  return (position, velocity, count, step, stream: RandomStream) => {
    const half = 0.5 * step;
    for (let axis = 0; axis < d; axis++) position[axis] += half * velocity[axis];
    if (walls !== null) reflect(position, velocity, walls);
    for (let done = 1; done <= count; done++) {
      evaluator.evaluateInto(position, force, friction, noise);
      if (!uniformBath || preparedFor !== step) {
        bath.prepare(friction, noise, step);
        preparedFor = step;
      }
      const drift = done === count ? half : step;
      for (let axis = 0; axis < d; axis++) velocity[axis] += half * force[axis];
      bath.apply(velocity, stream);
      for (let axis = 0; axis < d; axis++) {
        velocity[axis] += half * force[axis];
        position[axis] += drift * velocity[axis];
      }
      if (walls !== null) reflect(position, velocity, walls);
    }
  };
}
