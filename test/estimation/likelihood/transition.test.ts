import { describe, expect, it } from 'vitest';
import {
  SLOPE_SIZE,
  TRANSITION_SIZE,
  transitionInto,
  transitionSlopesInto,
} from '../../../src/estimation/likelihood/transition.js';
import { exactSecondOrderStep } from '../../support/exactProcesses.js';

const SERIES = 2e-9; // the terms left out of the power series, relative
const DIFFERENCE = 3e-7; // central differences of step 1e-5 in a function of order one

function transition(friction: number, slope: number, h: number): Float64Array {
  const out = new Float64Array(TRANSITION_SIZE);
  transitionInto(friction, slope, h, out);
  return out;
}

describe('the transition of one step', () => {
  // Source: Uhlenbeck & Ornstein 1930 (free motion and the bound particle), in the closed forms of the test processes.
  it.each([
    [0.01, 0],
    [0.2, 0],
    [0.5, 0],
    [3, 0],
    [0.05, 0.01],
    [0.3, 0.2],
    [0.5, 0.25],
    [0.02, 0.0004],
  ])('agrees with the closed forms at friction × interval %f and stiffness × interval² %f', (x, k) => {
    const h = 0.7;
    const friction = x / h;
    const stiffness = k / (h * h);
    const temperature = 1.3;
    const exact = exactSecondOrderStep(friction, temperature, stiffness, h);
    const found = transition(friction, stiffness, h);
    for (let i = 0; i < 4; i++) expect(found[i]).toBeCloseTo(exact.propagator[i], 8);
    const noise = 2 * friction * temperature;
    for (let i = 0; i < 3; i++) {
      // the closed form of the free process cancels where friction × interval is small
      expect(Math.abs((noise * found[6 + i]) / exact.covariance[i] - 1)).toBeLessThan(
        x < 0.05 ? 1e-6 : SERIES * 10,
      );
    }
  });

  it('responds to a constant force as the integrated propagator', () => {
    const [friction, h] = [0.6, 0.5];
    const found = transition(friction, 0.3, h);
    let place = 0;
    const pieces = 4000;
    for (let i = 0; i < pieces; i++)
      place += (transition(friction, 0.3, ((i + 0.5) * h) / pieces)[1] * h) / pieces;
    expect(found[4]).toBeCloseTo(place, 8);
    expect(found[5]).toBe(found[1]);
  });

  it.each([0.004, 0.1, 0.149, 0.151, 0.5, 2])('has the slopes of its differences at Γh = %f', (x) => {
    const h = 0.8;
    const friction = x / h;
    const slopes = new Float64Array(SLOPE_SIZE);
    transitionSlopesInto(friction, h, slopes);
    const step = 1e-5 * Math.max(friction, 0.05);
    const above = transition(friction + step, 0, h);
    const below = transition(friction - step, 0, h);
    [1, 3, 4, 6, 7, 8].forEach((slot, i) => {
      expect(Math.abs(slopes[i] - (above[slot] - below[slot]) / (2 * step))).toBeLessThan(
        DIFFERENCE * Math.max(1, Math.abs(slopes[i])) * (x < 0.05 ? 100 : 1),
      );
    });
  });
});
