import { describe, expect, it } from 'vitest';
import {
  type DisplacementModel,
  displacementCovariancesInto,
  oscillatorCorrelation,
} from '../../src/momenta/displacementModels.js';
import { exactSecondOrderStep } from '../support/exactProcesses.js';

const LAGS = 12;

function covariancesOf(model: DisplacementModel, errorVariance = 0): Float64Array {
  const out = new Float64Array(LAGS + 1);
  displacementCovariancesInto(model, errorVariance, out);
  return out;
}

/** The same from the exact one-frame step of position and velocity, multiplied out lag by lag. */
function multiplyOut(friction: number, temperature: number, stiffness: number): Float64Array {
  const { propagator, covariance } = exactSecondOrderStep(friction, temperature, stiffness, 1);
  const [qq, qv, vq, vv] = propagator;
  const spread = stiffness > 0 ? temperature / stiffness : 0; // a free displacement does not depend on the place
  // displacement = (qq − 1) q + qv v + kick
  const move = (q: number, v: number): number => (stiffness > 0 ? (qq - 1) * q : 0) + qv * v;
  const out = new Float64Array(LAGS + 1);
  out[0] = move(move(spread, 0), move(0, temperature)) + covariance[0];
  // covariance of (q, v) one frame later with the displacement
  let q = qq * (qq - 1) * spread + qv * qv * temperature + covariance[0];
  let v = vq * (qq - 1) * spread + vv * qv * temperature + covariance[1];
  for (let lag = 1; lag <= LAGS; lag++) {
    out[lag] = move(q, v);
    [q, v] = [qq * q + qv * v, vq * q + vv * v];
  }
  return out;
}

describe('displacement covariances', () => {
  it.each([1e-4, 0.05, 0.3, 1, 4])('of the free motion are those of its exact step (Γ = %s)', (friction) => {
    const covariances = covariancesOf({ kind: 'second-free', velocityVariance: 2, friction });
    multiplyOut(friction, 2, 0).forEach((value, lag) => {
      expect(covariances[lag]).toBeCloseTo(value, 10);
    });
  });

  it.each([
    [0.05, 0.09],
    [0.6, 0.09], // critically damped
    [3, 0.09],
    [0.01, 4],
    [5, 1e-3],
  ])('of the oscillator are those of its exact step (Γ = %s, k = %s)', (friction, stiffness) => {
    const covariances = covariancesOf({ kind: 'second-trapped', velocityVariance: 2, friction, stiffness });
    // The step takes its covariance as a difference, so round-off of the spread T/k remains.
    const digits = 12 - Math.ceil(Math.log10(1 + 2 / stiffness));
    multiplyOut(friction, 2, stiffness).forEach((value, lag) => {
      expect(covariances[lag]).toBeCloseTo(value, digits);
    });
  });

  it('of the trapped first-order motion telescope to the spread of an Ornstein–Uhlenbeck position', () => {
    // Var(q_L − q_0) = 2 (D/κ)(1 − e^{−κL}) = Σ over all pairs of displacements
    const [diffusion, relaxation] = [0.7, 0.2];
    const c = covariancesOf({ kind: 'first-trapped', diffusion, relaxation });
    let spread = 0;
    for (let i = 0; i < LAGS; i++) for (let k = 0; k < LAGS; k++) spread += c[Math.abs(i - k)];
    expect(spread).toBeCloseTo(((2 * diffusion) / relaxation) * (1 - Math.exp(-relaxation * LAGS)), 12);
  });

  it('of the free first-order motion are 2D and nothing more', () => {
    expect([...covariancesOf({ kind: 'first-free', diffusion: 0.5 })]).toEqual([
      1,
      ...Array<number>(LAGS).fill(0),
    ]);
  });

  it('take 2s² and −s² from the localization error', () => {
    for (const model of [
      { kind: 'first-free', diffusion: 0.5 },
      { kind: 'second-free', velocityVariance: 1, friction: 0.4 },
    ] as const) {
      const clean = covariancesOf(model);
      const noisy = covariancesOf(model, 0.3);
      expect(noisy[0] - clean[0]).toBeCloseTo(0.6, 14);
      expect(noisy[1] - clean[1]).toBeCloseTo(-0.3, 14);
      expect([...noisy.subarray(2)]).toEqual([...clean.subarray(2)]);
    }
  });

  it.each([0.3, 1])('of blurred diffusion are those of Berglund (exposure %s)', (exposure) => {
    const out = new Float64Array(LAGS + 1);
    displacementCovariancesInto({ kind: 'first-free', diffusion: 0.5 }, 0.2, out, exposure);
    // Phys. Rev. E 82 (2010) 011917: c₀ = 2D(1 − 2R) + 2s², c₁ = 2DR − s² with R = exposure/6; nothing beyond
    expect(out[0]).toBeCloseTo(1 - exposure / 3 + 0.4, 9);
    expect(out[1]).toBeCloseTo(exposure / 6 - 0.2, 9);
    for (const value of out.subarray(2)) expect(Math.abs(value)).toBeLessThan(1e-9);
  });

  it.each<DisplacementModel>([
    { kind: 'first-trapped', diffusion: 0.7, relaxation: 0.4 },
    { kind: 'second-free', velocityVariance: 2, friction: 0.3 },
    { kind: 'second-trapped', velocityVariance: 2, friction: 0.6, stiffness: 0.5 },
  ])('of blurred positions are the means over pairs of instants ($kind)', (model) => {
    const exposure = 0.8;
    const blurred = new Float64Array(LAGS + 1);
    displacementCovariancesInto(model, 0, blurred, exposure);
    // Snapshots over a fine interval 1/n: the covariance of positions averaged over the last m of n of them is a plain sum.
    const n = 40;
    const m = exposure * n;
    const fine = new Float64Array((LAGS + 3) * n);
    const shorter: DisplacementModel =
      model.kind === 'first-trapped'
        ? { ...model, diffusion: model.diffusion / n, relaxation: model.relaxation / n }
        : model.kind === 'second-trapped'
          ? { ...model, velocityVariance: 2 / n ** 2, friction: model.friction / n, stiffness: 0.5 / n ** 2 }
          : { kind: 'second-free', velocityVariance: 2 / n ** 2, friction: 0.3 / n };
    displacementCovariancesInto(shorter, 0, fine);
    // weights of the fine displacements in the difference of two averages
    const weights = Array.from({ length: n + m - 1 }, (_, i) =>
      Math.min(1, (i + 1) / m, (n + m - 1 - i) / m),
    );
    for (const lag of [0, 1, 2, 5]) {
      let sum = 0;
      weights.forEach((a, i) => {
        weights.forEach((b, j) => {
          sum += a * b * fine[Math.abs(lag * n + j - i)];
        });
      });
      // m instants spread over less than the exposure, by 1/(2m²) of it, and the blur is less than the whole.
      expect(Math.abs(sum - blurred[lag])).toBeLessThan((1.5 * blurred[0]) / (2 * m * m));
    }
  });

  it('make second differences of the factors 2/3 and 1/6 where a velocity lasts long', () => {
    // Var D = 2c₀ − 2c₁ = (2/3) N, Cov(D_k, D_{k+1}) = 2c₁ − c₀ − c₂ = (1/6) N, next terms O(Γ) relative
    const friction = 1e-3;
    const c = covariancesOf({ kind: 'second-free', velocityVariance: 1, friction });
    const noise = 2 * friction;
    expect(Math.abs((2 * c[0] - 2 * c[1]) / noise - 2 / 3)).toBeLessThan(friction);
    expect(Math.abs((2 * c[1] - c[0] - c[2]) / noise - 1 / 6)).toBeLessThan(friction);
  });
});

describe('the correlation of the oscillator', () => {
  it('passes through critical damping without a step', () => {
    const at = (stiffness: number) => oscillatorCorrelation(2, stiffness, 0.7);
    expect(at(1)).toBeCloseTo(Math.exp(-0.7) * 1.7, 14);
    // The derivative by k at k = 1 is finite, so 1e-9 to either side changes it by less than 1e-9.
    expect(Math.abs(at(1 - 1e-9) - at(1))).toBeLessThan(1e-9);
    expect(Math.abs(at(1 + 1e-9) - at(1))).toBeLessThan(1e-9);
  });

  it('becomes e^{−kτ/Γ} far overdamped, and stays finite', () => {
    expect(oscillatorCorrelation(1e4, 1, 1e4)).toBeCloseTo(Math.exp(-1), 7); // next term 1/Γ² relative
  });
});
