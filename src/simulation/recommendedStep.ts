/**
 * The time step at which a scenario should be integrated.
 */

import type { Scenario } from '../documents/Scenario.js';
import { quantileSorted } from '../numerics/statistics/quantile.js';
import { randomStream } from '../numerics/random/RandomStream.js';
import type { ScenarioEvaluator } from './ScenarioEvaluator.js';

export interface StepAdvice {
  /** Time step with which averages err by about a thousandth or less. */
  readonly step: number;
  /** Largest stable time step (2 over the fastest oscillation or relaxation); Infinity where nothing limits it. */
  readonly stable: number;
  /** What limits the recommended step. */
  readonly reason: 'friction' | 'force' | 'variation' | 'interval';
}

const FRICTION_SHARE = 0.1; // of 1/Γ: diffusion errs by (Γh)²/12
const FORCE_SHARE = 0.06; // of 1/ω: the temperature of an oscillator errs by (ωh)²/4
const DRIFT_SHARE = 0.05; // of 1/|μ′|, first order: the variance of a trap errs by (μ′h)²/6, a displacement by twice that
const VARIATION_SHARE = 0.1; // of the length over which coefficients change, per step, second order
const DIFFUSION_SHARE = 0.15; // likewise at first order, where averages then err by half a thousandth
const PLACES = 400;
const HIGH_SHARE = 0.98; // share of the probed places that must be covered; fitted edges may be wild

/**
 * Measures, at places the process visits, friction, force gradients and the lengths over which coefficients change.
 *
 * Second order  h ≤ 0.1/Γ, h ≤ 0.06/√|∂F|, and thermal motion per step ≤ 0.1 of the length over which force gradient,
 *               friction or noise change by their own size
 * First order   h ≤ 0.05/|∂μ|, and √(2Dh) ≤ 0.15 of that length for the diffusion
 *
 * The step never exceeds the interval between frames.
 */
export function recommendedStep(evaluator: ScenarioEvaluator, scenario: Scenario): StepAdvice {
  const { dimensions: d, bathSize, order } = evaluator;
  const { interval } = scenario.observation;
  const scale = measureLengthScale(scenario);
  const shift = 1e-3 * scale;
  const force = [new Float64Array(d), new Float64Array(d)];
  const friction = [new Float64Array(bathSize), new Float64Array(bathSize)];
  const noise = [new Float64Array(bathSize), new Float64Array(bathSize)];
  const middleFriction = new Float64Array(bathSize);
  const middleNoise = new Float64Array(bathSize);
  const middleForce = new Float64Array(d);
  const rates: number[] = []; // fastest relaxation or oscillation at each place
  const frictions: number[] = [];
  const variations: number[] = []; // 1 / step allowed by the change of coefficients
  for (const place of probePlaces(scenario)) {
    evaluator.evaluateInto(place, middleForce, middleFriction, middleNoise);
    const gamma = largest(middleFriction);
    const strength = largest(middleNoise);
    let gradient = 0;
    let change = 0; // relative change of friction and noise per length
    for (let axis = 0; axis < d; axis++) {
      const centre = place[axis];
      for (let side = 0; side < 2; side++) {
        place[axis] = centre + (side === 0 ? -shift : shift);
        evaluator.evaluateInto(place, force[side], friction[side], noise[side]);
      }
      place[axis] = centre;
      for (let i = 0; i < d; i++)
        gradient = Math.max(gradient, Math.abs(force[1][i] - force[0][i]) / (2 * shift));
      change = Math.max(change, relativeSlope(friction, gamma, shift), relativeSlope(noise, strength, shift));
    }
    if (order === 'second') {
      frictions.push(gamma);
      rates.push(Math.sqrt(gradient));
      const thermal = gamma > 0 ? Math.sqrt(strength / (2 * gamma)) : Math.sqrt(strength * interval);
      variations.push((change * thermal) / VARIATION_SHARE);
    } else {
      rates.push(gradient);
      variations.push((change / DIFFUSION_SHARE) ** 2 * 2 * strength);
    }
  }
  const high = (values: number[]): number => {
    if (values.length === 0) return 0;
    return quantileSorted(Float64Array.from(values).sort(), HIGH_SHARE);
  };
  const rate = high(rates);
  const limits: [StepAdvice['reason'], number][] = [
    ['interval', interval],
    ['friction', FRICTION_SHARE / high(frictions)],
    ['force', (order === 'second' ? FORCE_SHARE : DRIFT_SHARE) / rate],
    ['variation', 1 / high(variations)],
  ];
  const [reason, step] = limits.reduce((best, limit) => (limit[1] < best[1] ? limit : best));
  return { step, stable: 2 / rate, reason };
}

/** A length typical of the scenario: the visited box, the domain, or the spread of the starting points. */
export function measureLengthScale(scenario: Scenario): number {
  const { low, high } = probeBox(scenario);
  return low.reduce((least, value, axis) => Math.min(least, high[axis] - value || Infinity), Infinity);
}

/** Box in which coefficients are probed: the visited box, the domain, or where tracks start. */
export function probeBox(scenario: Scenario): { low: number[]; high: number[] } {
  const { axes, visited, start } = scenario;
  const low: number[] = [];
  const high: number[] = [];
  axes.forEach((axis, a) => {
    if (axis.kind !== 'open') {
      low.push(axis.low ?? 0);
      high.push(axis.high ?? 1);
    } else if (visited !== null) {
      low.push(visited.low[a]);
      high.push(visited.high[a]);
    } else {
      let [least, most] = [Infinity, -Infinity];
      if (start.kind === 'points') {
        for (const point of start.points) {
          least = Math.min(least, point[a]);
          most = Math.max(most, point[a]);
        }
      } else {
        const reach = start.kind === 'normal' ? 3 * start.spread[a] : start.spread[a];
        least = start.mean[a] - (start.kind === 'normal' ? reach : 0);
        most = start.mean[a] + reach;
      }
      if (!(most > least)) {
        const room = Math.abs(least) > 0 ? 0.5 * Math.abs(least) : 0.5;
        least -= room;
        most += room;
      }
      low.push(least);
      high.push(most);
    }
  });
  return { low, high };
}

function probePlaces(scenario: Scenario): Float64Array[] {
  const { low, high } = probeBox(scenario);
  const stream = randomStream(1, 'probe-places');
  const places: Float64Array[] = [];
  if (scenario.start.kind === 'points') {
    const { points } = scenario.start;
    const stride = Math.max(1, Math.ceil(points.length / (PLACES / 2)));
    for (let i = 0; i < points.length; i += stride) places.push(Float64Array.from(points[i]));
  }
  while (places.length < PLACES) {
    places.push(Float64Array.from(low, (value, axis) => value + stream.uniform() * (high[axis] - value)));
  }
  return places;
}

function largest(values: Float64Array): number {
  let most = 0;
  for (let i = 0; i < values.length; i++) most = Math.max(most, Math.abs(values[i]));
  return most;
}

function relativeSlope(sides: readonly Float64Array[], size: number, shift: number): number {
  if (!(size > 0)) return 0;
  let most = 0;
  for (let i = 0; i < sides[0].length; i++) most = Math.max(most, Math.abs(sides[1][i] - sides[0][i]));
  return most / (2 * shift * size);
}
