import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { NO_UNITS } from '../../src/units.js';
import { deviationOf, estimateColumns, meanOf } from '../support/estimateStudy.js';

/**
 * Free motion with friction [[g, w], [−w, g]] and equal noise on both axes, exactly. As a complex number v = v_x + i v_y
 * obeys dv = −λ v dt + dB with λ = g − i w; the step of (position, velocity) is then Gaussian with
 *   E|ξ|² = 2N (1 − e^{−2gΔ})/(2g),   E ζξ* = (2N/λ) [(1 − e^{−λ*Δ})/λ* − (1 − e^{−2gΔ})/(2g)],
 *   E|ζ|² = (2N/|λ|²) [Δ − 2 Re((1 − e^{−λΔ})/λ) + (1 − e^{−2gΔ})/(2g)]
 * for the random parts ξ of the velocity and ζ of the position (Itô isometry, as for λ real in Chandrasekhar 1943).
 */
function simulateTurning(
  g: number,
  w: number,
  noise: number,
  dt: number,
  error: number,
  seed: number,
): TrackSet {
  const [tracks, frames] = [40, 400];
  const e = Math.exp(-g * dt);
  const [er, ei] = [e * Math.cos(w * dt), e * Math.sin(w * dt)]; // e^{−λΔ} with λ = g − i w
  const size = g * g + w * w;
  // a = (1 − e^{−λΔ})/λ = (1 − e^{−λΔ}) λ*/|λ|², λ* = g + i w
  const [ar, ai] = [((1 - er) * g + ei * w) / size, ((1 - er) * w - ei * g) / size];
  const half = -Math.expm1(-2 * g * dt) / (2 * g);
  const velocityVariance = 2 * noise * half;
  const placeVariance = ((2 * noise) / size) * (dt - 2 * ar + half);
  // E ζξ* = 2N/λ (a* − half), 1/λ = (g + i w)/|λ|²
  const [br, bi] = [ar - half, -ai];
  const [cr, ci] = [(2 * noise * (br * g - bi * w)) / size, (2 * noise * (br * w + bi * g)) / size];
  // ζ = c/E|ξ|² ξ + rest
  const rest = Math.sqrt(Math.max(0, placeVariance - (cr * cr + ci * ci) / velocityVariance));
  const n = tracks * frames;
  const positions = new Float64Array(2 * n);
  const times = new Float64Array(n);
  for (let track = 0; track < tracks; track++) {
    const stream = randomStream(seed, 'turning', track);
    const normal = (variance: number) => Math.sqrt(variance / 2) * stream.normal();
    let [x, y] = [0, 0];
    let [vx, vy] = [normal(noise / g), normal(noise / g)];
    for (let frame = 0; frame < frames; frame++) {
      const row = track * frames + frame;
      times[row] = frame * dt;
      positions[2 * row] = x + error * stream.normal();
      positions[2 * row + 1] = y + error * stream.normal();
      const [xr, xi] = [normal(velocityVariance), normal(velocityVariance)];
      const [zr, zi] = [normal(rest * rest), normal(rest * rest)];
      x += ar * vx - ai * vy + (cr * xr - ci * xi) / velocityVariance + zr;
      y += ar * vy + ai * vx + (cr * xi + ci * xr) / velocityVariance + zi;
      [vx, vy] = [er * vx - ei * vy + xr, er * vy + ei * vx + xi];
    }
  }
  return {
    dimensions: 2,
    coordinates: ['x', 'y'],
    trackNames: Array.from({ length: tracks }, (_, track) => String(track)),
    trackOffsets: Int32Array.from({ length: tracks + 1 }, (_, track) => track * frames),
    times,
    positions,
    localizationErrors: null,
    trackTypes: null,
    samplingInterval: dt,
    periods: [0, 0],
    units: NO_UNITS,
  };
}

describe('friction as a full matrix', () => {
  it.each([
    [0, 0.5],
    [0.1, 0.5],
  ])(
    'recovers the antisymmetric part of friction that turns velocities (localization error %f)',
    (error, dt) => {
      const [g, w, noise] = [0.6, 0.9, 0.8];
      const seeds = 10;
      const found: Record<string, number[]> = {};
      for (let seed = 1; seed <= seeds; seed++) {
        const columns = estimateColumns(
          simulateTurning(g, w, noise, dt, error, seed),
          {
            force: 'constant',
            friction: 'constant',
            noise: 'constant',
            frictionForm: 'matrix',
            noiseForm: 'matrix',
          },
          'second',
          Float64Array.of(0, 0),
        );
        for (const [name, [value]] of Object.entries(columns)) (found[name] ??= []).push(value);
      }
      // dv_x = −g v_x − w v_y with λ = g − i w: v' = −λ v
      const truth: Record<string, number> = {
        force_x: 0,
        force_y: 0,
        friction_xx: g,
        friction_yy: g,
        friction_xy: w,
        friction_yx: -w,
        noise_xx: noise,
        noise_yy: noise,
        noise_xy: 0,
      };
      for (const [name, value] of Object.entries(truth)) {
        const bias = Math.abs(meanOf(found[name]) - value) / (deviationOf(found[name]) / Math.sqrt(seeds));
        // Student's t with 9 degrees of freedom exceeds 4.5 at 0.15 %
        expect.soft(bias, name).toBeLessThan(4.5);
      }
      expect(deviationOf(found.friction_xy)).toBeLessThan(0.1 * w);
    },
  );
});
