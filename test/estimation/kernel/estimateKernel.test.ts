import { describe, expect, it } from 'vitest';
import type { StudyInput } from '../../../src/documents/Study.js';
import { DataError } from '../../../src/errors.js';
import { chooseEstimator } from '../../../src/estimation/choose.js';
import { estimateDifferences } from '../../../src/estimation/differences/estimateDifferences.js';
import { estimateKernel } from '../../../src/estimation/kernel/estimateKernel.js';
import { describeVisited, visitedCentres } from '../../../src/tracks/visitedRegion.js';
import { drawReplicates } from '../../../src/uncertainty/bootstrap.js';
import {
  measureSpread,
  pointwiseMultiplier,
  simultaneousMultiplier,
} from '../../../src/uncertainty/spread.js';
import { CONSTANT } from '../../support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrder } from '../../support/exactProcesses.js';
import { simulateVaried } from '../../support/variedProcess.js';
import { BUMP, columnsOf, estimateWith, kernelColumns, simulateBump } from './kernelStudy.js';

describe('with constant coefficients', () => {
  const PLACE = Float64Array.of(0.3, -0.2);

  it.each<['first' | 'second', StudyInput]>([
    ['second', {}],
    ['second', { frictionForm: 'axes', noiseForm: 'axes' }],
    ['second', { frictionForm: 'matrix', noiseForm: 'matrix' }],
    ['second', { localizationError: 0.3 }],
    ['second', { exposure: 0.5 }],
    ['second', { force: 'zero' }],
    ['second', { friction: 'zero' }],
    ['first', {}],
    ['first', { drift: 'zero', noiseForm: 'matrix' }],
  ])('is the differences estimator up to the rows at the ends of runs (%s, %o)', (order, input) => {
    const design = { tracks: 30, frames: 400, dimensions: 2, localizationError: 0.3, seed: 8 };
    const tracks =
      order === 'second'
        ? simulateSecondOrder({ ...design, friction: [0.3, 0.5], stiffness: 0.04 })
        : simulateFirstOrder({ ...design, diffusion: [0.5, 1], relaxation: 0.05 });
    const study = { ...CONSTANT, ...input };
    const kernel = estimateWith(estimateKernel, tracks, study, order).estimate;
    const differences = estimateWith(estimateDifferences, tracks, study, order).estimate;
    const expected = columnsOf(differences, PLACE);
    const found = columnsOf(kernel, PLACE);
    expect(Object.keys(found)).toEqual(Object.keys(expected));
    // One row of 400 differs per track: estimates move by some twentieth of their standard deviation, 1/√400. A mean
    // acceleration is known far better than its rows, because neighbouring ones cancel; there the 30 rows of size 1 in
    // 12 000 that are missing count in full. Noise products look ahead: three pairs of residuals at either end of a track
    // change, of 400 rows with five pairs each, another √(6/2000) = 5 % of a standard deviation.
    const missing = order === 'second' && input.force !== 'zero' ? (4 * Math.sqrt(30)) / 12_000 : 0;
    const p = differences.parameters.length;
    const deviations = Array.from({ length: p }, (_, i) =>
      Math.sqrt(
        Array.from(
          { length: differences.influences.length / p },
          (__, b) => differences.influences[b * p + i],
        )
          .map((value) => value * value)
          .reduce((sum, value) => sum + value, 0),
      ),
    );
    expect(kernel.parameters.length).toBe(p);
    kernel.parameters.forEach((value, i) => {
      expect(Math.abs(value - differences.parameters[i])).toBeLessThan(
        Math.max(deviations[i] / 4, i < 2 ? missing : 0),
      );
    });
    kernel.localizationError.forEach(({ value, standardError }, axis) => {
      const other = differences.localizationError[axis];
      expect(Math.abs(value - other.value)).toBeLessThanOrEqual(0.2 * other.standardError + 1e-12);
      expect(standardError).toBeCloseTo(other.standardError, 3);
    });
    // The effects of blocks are the same too, but for the factor 1/(1 − 1/B) = 1.034 and the missing rows. The mean
    // acceleration of a track is that of its ends alone, one of which has moved: over 30 tracks the deviations of two
    // samples that share half of their variance differ by some 1/√60 = 13 %, here within two of these.
    const blocks = kernel.influences.length / p;
    for (let i = 0; i < p; i++) {
      let sum = 0;
      for (let b = 0; b < blocks; b++) sum += kernel.influences[b * p + i] ** 2;
      const ratio = Math.sqrt(sum) / deviations[i] / (blocks / (blocks - 1));
      expect(Math.abs(ratio - 1)).toBeLessThan(i < 2 && missing > 0 ? 0.26 : 0.06);
    }
  });
});

describe('on a bump of friction and noise', () => {
  const studies = [1, 2, 3, 4, 5, 6].map((seed) => {
    const tracks = simulateBump(seed);
    const { estimate, plan } = estimateWith(estimateKernel, tracks, {}, 'second');
    const visited = describeVisited(tracks);
    const centres = visitedCentres(visited);
    const spreads = measureSpread(estimate.model, drawReplicates(estimate, 400, seed), centres);
    const multiplier = pointwiseMultiplier(0.95, plan.blocks.count, 400);
    return { estimate, centres, spreads, multiplier };
  });

  it.each([
    // relative root-mean-square errors asked for; forty studies give 11.7, 6.5 and 3.1 %
    ['friction_xx', 0.12],
    ['noise_xx', 0.08],
    ['force_x', 0.15],
  ])('%s is found over the visited region to within %f', (name, bound) => {
    let error = 0;
    let size = 0;
    for (const { centres, spreads } of studies) {
      const column = spreads.find((spread) => spread.name === name);
      column?.values.forEach((value, i) => {
        error += (value - BUMP[name](centres[i])) ** 2;
        size += BUMP[name](centres[i]) ** 2;
      });
    }
    expect(size).toBeGreaterThan(0);
    // The error of one study is that of some ten independent places, so over six studies it scatters by 1/√120 = 9 %.
    expect(Math.sqrt(error / size)).toBeLessThan(bound * (1 + 2 * 0.09));
  });

  it('intervals and bands cover the truth, not its smoothed version', () => {
    let inside = 0;
    let places = 0;
    let whole = 0;
    let bands = 0;
    for (const { centres, spreads, multiplier } of studies) {
      for (const spread of spreads.filter(({ name }) => name in BUMP)) {
        const band = simultaneousMultiplier(spread, 0.95, multiplier);
        const distances = spread.values.map(
          (value, i) => Math.abs(value - BUMP[spread.name](centres[i])) / spread.deviations[i],
        );
        inside += distances.filter((distance) => distance <= multiplier).length;
        places += distances.length;
        whole += distances.every((distance) => distance <= band) ? 1 : 0;
        bands++;
      }
    }
    // 18 curves of some ten independent places each: 95 % within three standard errors of 1.6 %; bands: of 5.1 %
    expect(inside / places).toBeGreaterThan(0.95 - 3 * 0.016);
    expect(whole / bands).toBeGreaterThan(0.95 - 3 * 0.051);
  });

  it('the top of the bump is not flattened: the mean over studies is the truth within its error', () => {
    const top = studies.map(({ estimate }) => columnsOf(estimate, Float64Array.of(0)).friction_xx[0]);
    const mean = top.reduce((sum, value) => sum + value, 0) / top.length;
    // 4.5 % in one study; smoothing without correction is 7 % low on average
    expect(Math.abs(mean / 0.2 - 1)).toBeLessThan((3 * 0.045) / Math.sqrt(6));
  });

  it('bandwidths are reported in lengths with where their search began, and how bias is dealt with', () => {
    for (const { estimate } of studies) {
      for (const field of ['force', 'friction', 'noise']) {
        for (const kind of ['Bandwidth', 'PlugInBandwidth']) {
          const value = estimate.diagnostics[field + kind];
          expect(Array.isArray(value) && value.length === 1 && value[0] > 0.3 && value[0] < 100).toBe(true);
        }
      }
      expect(estimate.diagnostics.smoothingBias).toMatch(/corrected/);
      expect(estimate.diagnostics.converged).toBe(true);
    }
  });
});

describe('other processes', () => {
  it('finds diffusion and Itô drift around a circle at first order', () => {
    const places = Float64Array.from({ length: 8 }, (_, i) => (i * Math.PI) / 4);
    const tracks = simulateVaried({
      dimensions: 1,
      tracks: 40,
      frames: 1500,
      interval: 0.05,
      substeps: 10,
      periods: [2 * Math.PI],
      force: (place, out) => void (out[0] = 0.3 * Math.cos(place[0])),
      noise: (place, out) => void (out[0] = 0.5 + 0.3 * Math.sin(place[0])),
      localizationError: 0.1,
      startSpread: 3,
      warmUp: 2,
      seed: 1,
    });
    const { estimate } = estimateWith(estimateKernel, tracks, {}, 'first');
    const spreads = measureSpread(estimate.model, drawReplicates(estimate, 400, 1), places);
    const truth: Record<string, (x: number) => number> = {
      diffusion_xx: (x) => 0.5 + 0.3 * Math.sin(x),
      drift_x: (x) => 0.3 * Math.cos(x),
    };
    for (const { name, values, deviations } of spreads) {
      values.forEach((value, i) => {
        // finite intervals and noisy places shift the diffusion by up to 0.0075 (see firstOrder.test.ts)
        const shift = name === 'drift_x' ? 0 : 0.0075;
        expect(Math.abs(value - truth[name](places[i]))).toBeLessThan(3.5 * deviations[i] + shift);
      });
    }
    const [diffusion] = spreads.filter(({ name }) => name === 'diffusion_xx');
    expect(Math.max(...diffusion.deviations)).toBeLessThan(0.05);
    const [here, around] = columnsOf(estimate, Float64Array.of(0.01, 0.01 + 2 * Math.PI)).drift_x;
    expect(around).toBeCloseTo(here, 9);
  });

  it('finds friction per axis and a swirling force in two dimensions, one axis periodic', () => {
    const period = 12;
    const angular = (2 * Math.PI) / period;
    const tracks = simulateVaried({
      dimensions: 2,
      tracks: 40,
      frames: 120,
      interval: 0.5,
      substeps: 8,
      periods: [period, 0],
      force: (place, out) => {
        out[0] = 0.5 * Math.sin(angular * place[0]);
        out[1] = -0.15 * place[1];
      },
      friction: (place, out) => {
        out[0] = 0.5;
        out[1] = 0.5 + 0.3 * Math.cos(angular * place[0]);
      },
      noise: (_place, out) => void out.fill(1),
      localizationError: 0.05,
      startSpread: 3,
      warmUp: 20,
      seed: 2,
    });
    const places = Float64Array.of(0, 0, 3, 1, 6, -1, 9, 0, 3, -2);
    const { estimate } = estimateWith(
      estimateKernel,
      tracks,
      { frictionForm: 'axes', noise: 'constant', noiseForm: 'axes' },
      'second',
    );
    const spreads = measureSpread(estimate.model, drawReplicates(estimate, 300, 1), places);
    const truth: Record<string, (x: number, y: number) => number> = {
      force_x: (x) => 0.5 * Math.sin(angular * x),
      force_y: (_x, y) => -0.15 * y,
      friction_xx: () => 0.5,
      friction_yy: (x) => 0.5 + 0.3 * Math.cos(angular * x),
      noise_xx: () => 1,
      noise_yy: () => 1,
    };
    for (const { name, values, deviations } of spreads.filter((spread) => spread.name in truth)) {
      values.forEach((value, i) => {
        const distance = value - truth[name](places[2 * i], places[2 * i + 1]);
        expect(Math.abs(distance / deviations[i]), `${name} at place ${i}`).toBeLessThan(4); // 30 intervals
      });
    }
    const noise = columnsOf(estimate, places).noise_xx;
    expect(new Set(noise).size).toBe(1); // constant stays one number
  });

  it.each([
    [2, { frictionForm: 'matrix', noiseForm: 'matrix' }],
    [3, { frictionForm: 'axes', noiseForm: 'matrix' }],
  ] as const)('finds uniform friction in %i dimensions with %o', (d, forms) => {
    const friction = [0.3, 0.4, 0.5].slice(0, d);
    const tracks = simulateSecondOrder({
      tracks: 30,
      frames: 60,
      dimensions: d,
      friction,
      stiffness: 0.05,
      localizationError: 0.1,
      seed: 3,
    });
    const { estimate } = estimateWith(estimateKernel, tracks, { ...forms, force: 'linear' }, 'second');
    expect(estimate.diagnostics.converged).toBe(true);
    const truth: Record<string, number> = { friction_xx: 0.3, friction_yy: 0.4, friction_zz: 0.5 };
    const place = new Float64Array(d);
    for (const { name, values, deviations } of measureSpread(
      estimate.model,
      drawReplicates(estimate, 100, 1),
      place,
    )) {
      if (!name.startsWith('friction')) continue;
      expect(Math.abs(values[0] - (truth[name] ?? 0)) / deviations[0], name).toBeLessThan(4);
    }
    expect(estimate.warnings.map(({ code }) => code)).toContain('shape-taken-as-local'); // `linear` is not presumed
  });
});

describe('what does not change an estimate', () => {
  const CASES = {
    second: simulateSecondOrder({
      tracks: 30,
      frames: 60,
      dimensions: 2,
      friction: [0.3, 0.4],
      stiffness: [0.05, 0.08],
      localizationError: 0.1,
      seed: 2,
    }),
    first: simulateFirstOrder({
      tracks: 30,
      frames: 60,
      dimensions: 2,
      diffusion: [0.5, 0.8],
      relaxation: 0.1,
      localizationError: 0.2,
      seed: 2,
    }),
  };
  const PLACES = Float64Array.of(0, 0, 1, -0.5, -1.5, 1, 0.4, 1.7);
  const FORMS: StudyInput = { frictionForm: 'axes', noiseForm: 'axes' };

  it.each(['second', 'first'] as const)('is a change of units, origin or sides at %s order', (order) => {
    const tracks = CASES[order];
    const original = kernelColumns(tracks, FORMS, order, PLACES);
    // x and y exchange, x turns over, lengths are 37.3 times and times 0.0041 times as long, and the origin moves
    const [length, time] = [37.3, 0.0041];
    const move = (source: Float64Array): Float64Array =>
      source.map((_, i) => (i % 2 === 0 ? 20 + length * source[i + 1] : -length * source[i - 1] - 11));
    const moved = kernelColumns(
      {
        ...tracks,
        positions: move(tracks.positions),
        times: tracks.times.map((t) => t * time),
        samplingInterval: tracks.samplingInterval * time,
      },
      FORMS,
      order,
      move(PLACES),
    );
    const factors: Record<string, number> = {
      force: length / time ** 2,
      friction: 1 / time,
      noise: length ** 2 / time ** 3,
      temperature: length ** 2 / time ** 2,
      drift: length / time,
      diffusion: length ** 2 / time,
    };
    for (const name of Object.keys(original)) {
      const [field, axes] = name.split('_');
      const other =
        moved[`${field}_${axes.startsWith('x') ? axes.replaceAll('x', 'y') : axes.replaceAll('y', 'x')}`];
      const sign = name === 'force_x' || name === 'drift_x' ? -1 : 1;
      const size = Math.max(...original[name].map(Math.abs));
      original[name].forEach((value, i) => {
        // The box is padded by 1e-9 of its width at one end; conditioning carries that to some 1e-6.
        expect(Math.abs((sign * other[i]) / factors[field] - value) / size, name).toBeLessThan(1e-4);
      });
    }
  });
});

describe('refusals and choices', () => {
  it('goes by its name', () => {
    const tracks = simulateFirstOrder({ tracks: 5, frames: 100, seed: 1 });
    const { plan, estimate } = estimateWith(estimateKernel, tracks, {}, 'first');
    expect(chooseEstimator('kernel')(tracks, plan).parameters).toEqual(estimate.parameters);
  });

  it('says what is missing where runs are too short', () => {
    const second = simulateSecondOrder({ tracks: 20, frames: 6, friction: 0.3, seed: 1 });
    expect(() => kernelColumns(second, {}, 'second', Float64Array.of(0))).toThrow(DataError);
    const first = simulateFirstOrder({ tracks: 20, frames: 3, seed: 1 });
    expect(() => kernelColumns(first, {}, 'first', Float64Array.of(0))).toThrow(/gap-free positions/);
  });
});
