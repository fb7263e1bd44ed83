import { describe, expect, it } from 'vitest';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { CONSTANT, deviationOf, estimateColumns, estimateStudy, meanOf } from '../support/estimateStudy.js';
import { simulateFirstOrder } from '../support/exactProcesses.js';
import { simulateVaried } from '../support/variedProcess.js';

/**
 * The covariance-based estimator as published (Vestergaard, Blainey & Flyvbjerg, Phys. Rev. E 89 (2014) 022726, eqs. 14
 * and 15 without motion blur), here with both neighbours of each displacement, which weighs the ends of a track alike.
 */
function covarianceBased(tracks: TrackSet): { diffusion: number; variance: number } {
  const { positions: y, trackOffsets, samplingInterval: dt } = tracks;
  let own = 0;
  let next = 0;
  let previous = 0;
  let count = 0;
  for (let track = 0; track + 1 < trackOffsets.length; track++) {
    for (let k = trackOffsets[track] + 1; k < trackOffsets[track + 1] - 2; k++) {
      const step = y[k + 1] - y[k];
      own += step * step;
      next += step * (y[k + 2] - y[k + 1]);
      previous += step * (y[k] - y[k - 1]);
      count++;
    }
  }
  return { diffusion: (own + next + previous) / count / (2 * dt), variance: -next / count };
}

describe('first order', () => {
  it.each([0, 0.4, 1.5])(
    'with constant diffusion and no drift is the covariance-based estimator to rounding (error %f)',
    (localizationError) => {
      const tracks = simulateFirstOrder({
        tracks: 12,
        frames: 80,
        interval: 0.2,
        localizationError,
        seed: 4,
      });
      const { model, localizationError: errors } = estimateStudy(
        tracks,
        { drift: 'zero', diffusion: 'constant' },
        'first',
      ).estimate;
      if (model.order !== 'first') throw new Error('first order was asked for');
      const expected = covarianceBased(tracks);
      expect(Math.abs(model.diffusion.coefficients[0][0] / expected.diffusion - 1)).toBeLessThan(1e-8);
      expect(errors[0].value).toBeCloseTo(Math.sqrt(Math.max(0, expected.variance)), 12);
      expect(model.drift.coefficients).toEqual([[0]]);
    },
  );

  it('averages the axes for a scalar diffusion and keeps them apart otherwise', () => {
    const tracks = simulateFirstOrder({ tracks: 20, frames: 300, dimensions: 2, diffusion: [1, 3], seed: 6 });
    const place = Float64Array.of(0, 0);
    const one = estimateColumns(tracks, { ...CONSTANT, noiseForm: 'scalar' }, 'first', place);
    const two = estimateColumns(tracks, { ...CONSTANT, noiseForm: 'axes' }, 'first', place);
    const full = estimateColumns(tracks, { ...CONSTANT, noiseForm: 'matrix' }, 'first', place);
    expect(one.diffusion_xx[0]).toBeCloseTo((two.diffusion_xx[0] + two.diffusion_yy[0]) / 2, 7);
    expect(full.diffusion_xx[0]).toBeCloseTo(two.diffusion_xx[0], 7);
    expect(full.diffusion_yy[0]).toBeCloseTo(two.diffusion_yy[0], 7);
    // independent axes: off-diagonal entry 0, with standard error √(D_x D_y · O(1)/n) below 4 %
    expect(Math.abs(full.diffusion_xy[0])).toBeLessThan(4 * Math.sqrt(3 / 6000) * 1.5);
  });

  it('recovers diffusion and Itô drift that vary with place, to within their scatter', () => {
    // D = 0.5 + 0.3 sin x around a circle, no force: the Itô drift of the isothermal reading is D′ = 0.3 cos x
    const places = Float64Array.from({ length: 8 }, (_, i) => (i * Math.PI) / 4);
    const seeds = 6;
    const diffusions: number[][] = [];
    const drifts: number[][] = [];
    for (let seed = 1; seed <= seeds; seed++) {
      const tracks = simulateVaried({
        dimensions: 1,
        tracks: 30,
        frames: 1500,
        interval: 0.05,
        substeps: 10,
        periods: [2 * Math.PI],
        force: (place, out) => void (out[0] = 0.3 * Math.cos(place[0])),
        noise: (place, out) => void (out[0] = 0.5 + 0.3 * Math.sin(place[0])),
        localizationError: 0.1,
        startSpread: 3,
        warmUp: 2,
        seed,
      });
      const columns = estimateColumns(tracks, { drift: 'waves:1', diffusion: 'waves:1' }, 'first', places);
      diffusions.push(Array.from(columns.diffusion_xx));
      drifts.push(Array.from(columns.drift_x));
    }
    // The penalty trades bias against scatter: the mean error may be as large as the scatter of one study, with three
    // standard errors of a mean over six. Diffusion is read at the start of each interval and at noisy places: by
    // Itô's formula that adds (μD′ + DD″)Δ/2 and D″s²/2, in sum up to 0.0075.
    const check = (values: readonly number[], truth: number, shift: number): void => {
      const scatter = deviationOf(values);
      expect(Math.abs(meanOf(values) - truth)).toBeLessThan(scatter * (1 + 3 / Math.sqrt(seeds)) + shift);
    };
    places.forEach((x, i) => {
      const [truth, curvature] = [0.5 + 0.3 * Math.sin(x), -0.3 * Math.sin(x)];
      const diffusion = diffusions.map((row) => row[i]);
      const read = Math.abs(0.09 * Math.cos(x) ** 2 + truth * curvature) * 0.025;
      check(diffusion, truth, read + (Math.abs(curvature) * 0.01) / 2);
      check(
        drifts.map((row) => row[i]),
        0.3 * Math.cos(x),
        0,
      );
      expect(Math.abs(meanOf(diffusion) / truth - 1)).toBeLessThan(0.03);
    });
  });
});
