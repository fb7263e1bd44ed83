/**
 * Step-size control by halving: averages at twice the step, the step and half the step, over the same noise, say how
 * far those at the step are off, and with which power of the step they converge.
 *
 * For averages A with error c hᵖ, D₁ = A(2h) − A(h) and D₂ = A(h) − A(h/2) give p = log₂(D₁/D₂) and the error of A(h) as
 * D₂ · 2ᵖ/(2ᵖ − 1) (Richardson 1911), here with the order p = 2 of the integrators.
 *
 * Source  Talay & Tubaro, Stoch. Anal. Appl. 8 (1990) 483: that weak errors expand in powers of the step.
 */

import type { ReportShare } from '../numerics/ReportShare.js';
import { randomStream } from '../numerics/random/RandomStream.js';
import { CoupledStream } from './CoupledStream.js';
import type { Integrator } from './Integrator.js';

export interface StepControl {
  /** The step that was reached. */
  readonly step: number;
  readonly halvings: number;
  /** Largest error of an average at that step, as a share of its size, and the standard error of this number. */
  readonly error: number;
  readonly errorDeviation: number;
  /** The average that errs most. */
  readonly average: string;
  /** Observed order, where the errors stand out of the scatter; else null. */
  readonly order: number | null;
  readonly orderDeviation: number | null;
  /** Whether the tolerance was met, as far as the scatter shows. */
  readonly converged: boolean;
}

export interface StepControlOptions {
  /** Step to begin with. */
  readonly step: number;
  /** Largest stable step. */
  readonly stable: number;
  /** Share of its size by which an average may be off. */
  readonly tolerance: number;
  readonly seed: number;
  /** Time between frames, over which displacements are taken. */
  readonly interval: number;
  /** Length of a recording; averages are taken over its second half, or less where it is long. */
  readonly duration: number;
  /** Puts a particle where tracks start. */
  readonly drawStart: (
    position: Float64Array,
    velocity: Float64Array,
    stream: ReturnType<typeof randomStream>,
  ) => void;
  /** Is told about how much is done. */
  readonly onProgress?: ReportShare;
}

const MAX_HALVINGS = 6;
const STEPS = 2_000_000; // of all particles and levels together, in the first round; more in the next ones
const LONGEST = 2000; // coarse steps per particle
const FEWEST_PARTICLES = 40;
const RATIOS = [4, 2, 1]; // fine steps in one step of each level: 2h, h, h/2
const RESOLVED = 3; // standard errors that a difference must stand out by for its order to be told
const STABLE_SHARE = 0.4; // of the largest stable step: beyond it errors no longer follow a power
const WELL_RESOLVED = 0.25; // standard error of such an order

/** Halves the step until no average errs by more than the tolerance. */
export function controlStep(integrator: Integrator, options: StepControlOptions): StepControl {
  let { step } = options;
  let told: Pick<StepControl, 'order' | 'orderDeviation'> = { order: null, orderDeviation: null };
  for (let halvings = 0; ; halvings++) {
    const found = measureStep(integrator, options, step, halvings);
    // The last order that is well resolved is kept: at smaller steps the errors vanish in the scatter.
    if (told.order === null || (found.orderDeviation ?? Infinity) < WELL_RESOLVED) told = found;
    if (found.converged || halvings === MAX_HALVINGS) {
      // A step that was good from the start has errors too small to show an order: larger ones are tried for it.
      for (const scale of [2, 4, 8]) {
        if (told.order !== null || 2 * scale * found.step > STABLE_SHARE * options.stable) break;
        told = measureStep(integrator, options, scale * found.step, MAX_HALVINGS + scale);
      }
      return { ...found, order: told.order, orderDeviation: told.orderDeviation };
    }
    step = found.step / 2;
  }
}

function measureStep(
  integrator: Integrator,
  { tolerance, seed, interval, duration, drawStart, onProgress }: StepControlOptions,
  step: number,
  halvings: number,
): StepControl {
  const { evaluator } = integrator;
  const d = evaluator.dimensions;
  const isSecond = evaluator.order === 'second';
  const perFrame = Math.max(1, Math.ceil(interval / step - 1e-9));
  const stretch = 2 * interval; // holds a whole number of steps at every level
  const fineSteps = 4 * perFrame;
  const stretches = Math.max(2, Math.min(Math.ceil(duration / stretch), Math.ceil(LONGEST / perFrame)));
  const budget = STEPS * 2 ** Math.min(halvings, 2);
  const particles = Math.max(FEWEST_PARTICLES, Math.floor(budget / (stretches * perFrame * 7)));
  const names = [
    'position',
    'squared position',
    'squared displacement',
    ...(isSecond ? ['squared velocity'] : []),
  ];
  const perLevel = names.length * d;
  const fine = new Float64Array(fineSteps * d);
  const q = RATIOS.map(() => new Float64Array(d));
  const v = RATIOS.map(() => new Float64Array(d));
  const before = new Float64Array(d);
  const start = new Float64Array(d);
  const averages = RATIOS.map(() => new Float64Array(perLevel));
  const first = new Moments(perLevel); // D₁
  const second = new Moments(perLevel); // D₂
  const sizes = new Moments(perLevel);
  const counted = stretches - (stretches >> 1);
  for (let particle = 0; particle < particles; particle++) {
    const stream = randomStream(seed, `step-control-${halvings}`, particle);
    const levels = RATIOS.map((_, level) => {
      const { bits } = stream;
      return new CoupledStream([bits.call(stream), bits.call(stream), bits.call(stream), level + 1]);
    });
    drawStart(q[0], v[0], stream);
    start.set(q[0]);
    for (let level = 0; level < RATIOS.length; level++) {
      q[level].set(q[0]);
      v[level].set(v[0]);
      averages[level].fill(0);
    }
    for (let s = 0; s < stretches; s++) {
      for (let i = 0; i < fine.length; i++) fine[i] = stream.normal();
      for (let level = 0; level < RATIOS.length; level++) {
        levels[level].load(fine, RATIOS[level], d);
        before.set(q[level]);
        const steps = fineSteps / RATIOS[level];
        integrator.advance(q[level], v[level], steps, stretch / steps, levels[level]);
        if (s < stretches >> 1) continue;
        for (let axis = 0; axis < d; axis++) {
          const x = q[level][axis] - start[axis];
          const move = q[level][axis] - before[axis];
          averages[level][axis] += x / counted;
          averages[level][d + axis] += (x * x) / counted;
          averages[level][2 * d + axis] += (move * move) / counted;
          if (isSecond) averages[level][3 * d + axis] += v[level][axis] ** 2 / counted;
        }
      }
    }
    for (let i = 0; i < perLevel; i++) {
      first.add(i, averages[0][i] - averages[1][i]);
      second.add(i, averages[1][i] - averages[2][i]);
      sizes.add(i, averages[1][i]);
    }
    onProgress?.(1 - 0.5 ** (halvings + particle / particles)); // as if the next halving were the last
    first.count++;
    second.count++;
    sizes.count++;
  }
  let worst = 0;
  let worstShare = -1;
  let clearest = 0;
  let clearness = 0;
  const share = (i: number): number => {
    // a mean position is measured against the root mean square, everything else against itself
    const size = i < d ? Math.sqrt(sizes.mean(d + i)) : sizes.mean(i);
    return size > 0 ? 4 / (3 * size) : 0;
  };
  for (let i = 0; i < perLevel; i++) {
    const size = Math.abs(second.mean(i)) * share(i);
    if (size > worstShare) [worst, worstShare] = [i, size];
    const signal = second.deviation(i) > 0 ? Math.abs(second.mean(i)) / second.deviation(i) : 0;
    if (signal > clearness) [clearest, clearness] = [i, signal];
  }
  const ratio = first.mean(clearest) / second.mean(clearest);
  const isResolved = clearness > RESOLVED && ratio > 0;
  const relative = Math.hypot(
    first.deviation(clearest) / first.mean(clearest),
    second.deviation(clearest) / second.mean(clearest),
  );
  const errorDeviation = second.deviation(worst) * share(worst);
  return {
    step: interval / perFrame,
    halvings,
    error: worstShare,
    errorDeviation,
    average: `${names[Math.floor(worst / d)]} ${'xyz'[worst % d]}`,
    order: isResolved ? Math.log2(ratio) : null,
    orderDeviation: isResolved ? relative / Math.LN2 : null,
    converged: worstShare <= tolerance + 2 * errorDeviation && errorDeviation <= tolerance,
  };
}

/** Means over particles with their standard errors. */
class Moments {
  count = 0;
  readonly #sums: Float64Array;
  readonly #squares: Float64Array;

  constructor(length: number) {
    this.#sums = new Float64Array(length);
    this.#squares = new Float64Array(length);
  }

  add(index: number, value: number): void {
    this.#sums[index] += value;
    this.#squares[index] += value * value;
  }

  mean(index: number): number {
    return this.#sums[index] / this.count;
  }

  /** Standard error of the mean. */
  deviation(index: number): number {
    const mean = this.mean(index);
    return Math.sqrt(
      Math.max(0, this.#squares[index] / this.count - mean * mean) / Math.max(1, this.count - 1),
    );
  }
}
