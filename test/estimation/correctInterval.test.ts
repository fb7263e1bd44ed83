import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  correctFirstOrderInto,
  correctSecondOrderInto,
  stiffnessGain,
} from '../../src/estimation/differences/correctInterval.js';
import { residualCovarianceRatio } from '../../src/estimation/differences/residuals.js';
import { exponentiateMatrix } from '../../src/numerics/linear/smallMatrix.js';
import { exactSecondOrderStep } from '../support/exactProcesses.js';

const REFERENCE = JSON.parse(
  readFileSync(new URL('../reference/intervals/values.json', import.meta.url), 'utf8'),
) as {
  ratios: [number, number][];
  gains: { friction: number; stiffness: number; half: number; effective: number; gain: number }[];
};

/**
 * Coefficients of the regression D/Δ² = −K q − G v̂ of the oscillator, from its exact transition alone: the conditional
 * means of the next two places, started at (1, 0) and at (0, 1), give two equations for the two unknowns.
 */
function effectiveCoefficients(friction: number, stiffness: number, dt: number): { k: number; g: number } {
  const [qq, qv, vq, vv] = exactSecondOrderStep(friction, 1, stiffness, dt).propagator;
  const once = [qq, qv];
  const twice = [qq * qq + qv * vq, qq * qv + qv * vv];
  const rows = [0, 1].map((start) => {
    const first = 1 - start;
    return {
      place: once[start],
      velocity: (twice[start] - first) / (2 * dt),
      acceleration: (twice[start] - 2 * once[start] + first) / dt ** 2,
    };
  });
  const [a, b] = rows;
  const determinant = a.place * b.velocity - b.place * a.velocity;
  return {
    k: -(a.acceleration * b.velocity - b.acceleration * a.velocity) / determinant,
    g: -(a.place * b.acceleration - b.place * a.acceleration) / determinant,
  };
}

describe('residual covariances', () => {
  it('have the ratio computed with mpmath (test/reference/intervals)', () => {
    for (const [half, ratio] of REFERENCE.ratios) {
      expect(Math.abs(residualCovarianceRatio(half) / ratio - 1)).toBeLessThan(1e-10);
    }
  });

  it('have the ratio 4 = (2/3)/(1/6) for short intervals (Gloter 2006)', () => {
    expect(residualCovarianceRatio(0)).toBe(4);
    expect(residualCovarianceRatio(1e-7)).toBeCloseTo(2 / 3 / (1 / 6), 12);
  });

  it('have a ratio that does not jump where series and closed form meet', () => {
    const meeting = Math.tanh(0.01);
    const below = residualCovarianceRatio(meeting - 1e-9);
    const above = residualCovarianceRatio(meeting + 1e-9);
    expect(Math.abs(above - below)).toBeLessThan(1e-8);
  });
});

describe('second order', () => {
  it('k/K agrees with mpmath (test/reference/intervals)', () => {
    for (const { half, effective, gain } of REFERENCE.gains) {
      expect(Math.abs(stiffnessGain(half, effective) / gain - 1)).toBeLessThan(1e-8);
    }
  });

  it('k/K does not jump where its series begins, nor at friction zero', () => {
    for (const half of [0, 0.005, 0.3, 0.9, -0.3]) {
      for (const sign of [1, -1]) {
        const inside = stiffnessGain(half, sign * 0.99999e-4);
        const outside = stiffnessGain(half, sign * 1.00001e-4);
        expect(Math.abs(inside - outside)).toBeLessThan(1e-7);
      }
    }
    expect(stiffnessGain(0, 0)).toBe(1);
    expect(stiffnessGain(-0.3, 0.2)).toBeCloseTo(stiffnessGain(0.3, 0.2), 14);
    // undamped: K Δ² = 2 − 2 cos ωΔ
    expect(stiffnessGain(0, 2 - 2 * Math.cos(0.8)) * (2 - 2 * Math.cos(0.8))).toBeCloseTo(0.64, 12);
  });

  it.each([
    [0.05, 0.01, 1],
    [0.5, 0.3, 1],
    [2, 1, 0.5], // critical damping
    [6, 1, 0.5], // overdamped
    [0.2, 1.5, 1],
    [0.8, 30, 0.1],
    [0.4, 1e-6, 1],
  ])(
    'friction %f and stiffness %f come back exactly from the oscillator sampled at %f',
    (friction, stiffness, dt) => {
      const { k, g } = effectiveCoefficients(friction, stiffness, dt);
      expect(Math.abs((g * dt) / 2 / Math.tanh((friction * dt) / 2) - 1)).toBeLessThan(1e-8);
      const place = 0.7;
      const local = {
        force: Float64Array.of(-k * place),
        friction: Float64Array.of(g),
        noise: Float64Array.of(1),
      };
      correctSecondOrderInto(local, [-k], [0], dt);
      expect(Math.abs(local.friction[0] / friction - 1)).toBeLessThan(1e-8);
      expect(Math.abs(local.force[0] / (-stiffness * place) - 1)).toBeLessThan(2e-8);
      // Noise: amplitude shrinks as the force does
      expect(local.noise[0]).toBeCloseTo((stiffness / k) ** 2, 6);
    },
  );

  it('takes the localization error off the noise before it is scaled', () => {
    const { k, g } = effectiveCoefficients(0.5, 0.3, 1);
    const correct = (error: number, effective: number): number => {
      const local = {
        force: Float64Array.of(0),
        friction: Float64Array.of(g),
        noise: Float64Array.of(effective),
      };
      correctSecondOrderInto(local, [-k], [error ** 2], 1);
      return local.noise[0];
    };
    // q + η has the long-run variance of e raised by K² s² Δ: the transfer from q to e at frequency zero is K
    expect(correct(0.4, 1 + k * k * 0.16)).toBeCloseTo(correct(0, 1), 12);
  });

  it('undoes friction with rotation and anisotropy exactly: GΔ/2 = tanh(ΓΔ/2) as matrices', () => {
    const friction = [0.6, -0.9, 0.7, 0.8];
    const dt = 0.5;
    const decay = exponentiateMatrix(
      friction.map((value) => -value * dt),
      2,
    );
    // v' = e v: the regression of v' − v on (v' + v)/2 has G Δ = 2 (1 − e)(1 + e)⁻¹, e a 2 × 2 matrix
    const [a, b, c, d] = [1 + decay[0], decay[1], decay[2], 1 + decay[3]];
    const det = a * d - b * c;
    const inverse = [d / det, -b / det, -c / det, a / det];
    const lost = [1 - decay[0], -decay[1], -decay[2], 1 - decay[3]];
    const effective = [
      lost[0] * inverse[0] + lost[1] * inverse[2],
      lost[0] * inverse[1] + lost[1] * inverse[3],
      lost[2] * inverse[0] + lost[3] * inverse[2],
      lost[2] * inverse[1] + lost[3] * inverse[3],
    ].map((value) => (2 * value) / dt);
    const uniform = [1.3, -0.4];
    // a uniform force f moves v to Γ⁻¹ f in the mean, so F_e = G Γ⁻¹ f
    const determinant = friction[0] * friction[3] - friction[1] * friction[2];
    const terminal = [
      (friction[3] * uniform[0] - friction[1] * uniform[1]) / determinant,
      (-friction[2] * uniform[0] + friction[0] * uniform[1]) / determinant,
    ];
    const local = {
      force: Float64Array.of(
        effective[0] * terminal[0] + effective[1] * terminal[1],
        effective[2] * terminal[0] + effective[3] * terminal[1],
      ),
      friction: Float64Array.from(effective),
      noise: Float64Array.of(1, 0, 0, 1),
    };
    correctSecondOrderInto(local, [0, 0], [0, 0], dt);
    friction.forEach((value, i) => expect(local.friction[i]).toBeCloseTo(value, 8));
    uniform.forEach((value, i) => expect(local.force[i]).toBeCloseTo(value, 3));
  });

  it('stays finite where velocities are forgotten within the interval', () => {
    for (const g of [1.999, 2, 5, -3]) {
      const local = { force: Float64Array.of(1), friction: Float64Array.of(g), noise: Float64Array.of(1) };
      correctSecondOrderInto(local, [-0.4], [0], 1);
      expect([local.force[0], local.friction[0], local.noise[0]].every(Number.isFinite)).toBe(true);
    }
  });
});

describe('first order', () => {
  it.each([
    [0.01, 1],
    [0.5, 1],
    [2, 0.7],
    [1e-9, 1],
  ])('drift and diffusion of a trap of rate %f sampled at %f come back exactly', (rate, dt) => {
    const [diffusion, error, place] = [0.3, 0.2, 1.1];
    const decay = Math.exp(-rate * dt);
    const slope = Math.expm1(-rate * dt) / dt;
    // e_k = (ξ_k + η_{k+1} − ρ η_k)/Δ with Var ξ = D (1 − ρ²)/κ; its covariances at lags −1, 0, 1 summed
    const innovations = (-diffusion / rate) * Math.expm1(-2 * rate * dt);
    const effective = (innovations + error ** 2 * (1 + decay ** 2 - 2 * decay)) / (2 * dt);
    const local = {
      force: Float64Array.of(slope * place),
      friction: Float64Array.of(0),
      noise: Float64Array.of(effective),
    };
    correctFirstOrderInto(local, [slope], [error ** 2], dt);
    expect(local.force[0] / (-rate * place)).toBeCloseTo(1, 7);
    expect(local.noise[0] / diffusion).toBeCloseTo(1, 7);
  });

  it('leaves free diffusion as it is, in every entry of a matrix', () => {
    const local = {
      force: Float64Array.of(0.3, -0.1),
      friction: new Float64Array(4),
      noise: Float64Array.of(1, 0.2, 0.2, 2),
    };
    correctFirstOrderInto(local, [0, 0], [0.5, 0.5], 1);
    expect(Array.from(local.noise)).toEqual([1, 0.2, 0.2, 2]);
    expect(Array.from(local.force)).toEqual([0.3, -0.1]);
  });
});
