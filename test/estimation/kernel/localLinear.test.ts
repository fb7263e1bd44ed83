import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { type BinnedMoments, MomentCollector } from '../../../src/estimation/kernel/BinnedMoments.js';
import { createFieldSmoother, smooth } from '../../../src/estimation/kernel/fieldSmoother.js';
import { createKernelGrid, type KernelGrid } from '../../../src/estimation/kernel/grid.js';
import {
  frictionField,
  groupComponents,
  type LocalField,
  noiseField,
  vectorField,
} from '../../../src/estimation/kernel/localFields.js';
import { applyWeights, localLinearWeights, sumRows } from '../../../src/estimation/kernel/localLinear.js';
import { createKnotWeights } from '../../../src/estimation/kernel/motionMoments.js';
import { solveFields } from '../../../src/estimation/kernel/solveFields.js';
import { createWindows } from '../../../src/estimation/kernel/windows.js';
import { randomStream } from '../../../src/numerics/random/RandomStream.js';
import type { TrackSet } from '../../../src/tracks/TrackSet.js';
import { NO_UNITS } from '../../../src/units.js';

/** A grid over the unit box; `positions` sets how fine it is. */
function unitGrid(periods: readonly number[], positions: number): KernelGrid {
  const d = periods.length;
  const tracks: TrackSet = {
    dimensions: d,
    coordinates: ['x', 'y', 'z'].slice(0, d),
    trackNames: ['1'],
    trackOffsets: Int32Array.of(0, positions),
    times: new Float64Array(positions),
    positions: new Float64Array(positions * d),
    localizationErrors: null,
    trackTypes: null,
    samplingInterval: 1,
    periods,
    units: NO_UNITS,
  };
  const low = new Array<number>(d).fill(0);
  return createKernelGrid(tracks, { low, high: low.map(() => 1), cells: [], counts: [], threshold: 1 });
}

interface Row {
  readonly place: readonly number[];
  readonly seen: readonly number[];
  readonly z: readonly number[];
  readonly x: readonly number[];
  readonly responses: readonly number[];
}

function collect(grid: KernelGrid, rows: readonly Row[]): BinnedMoments {
  const [{ z, responses }] = rows;
  const collector = new MomentCollector(grid.size, z.length, responses.length, 2);
  const at = createKnotWeights(grid);
  const seen = createKnotWeights(grid);
  rows.forEach((row, index) => {
    at.count = grid.basis.evaluateInto(row.place, 0, at.indices, at.values);
    seen.count = grid.basis.evaluateInto(row.seen, 0, seen.indices, seen.values);
    collector.add(
      index % 2,
      at,
      seen,
      Float64Array.from(row.z),
      Float64Array.from(row.x),
      Float64Array.from(row.responses),
    );
  });
  return collector.finish();
}

describe('local linear regression on bins', () => {
  it('is KernSmooth::locpoly where instruments and regressors are plain ones (test/reference/kernel)', () => {
    const { sets } = JSON.parse(
      readFileSync(new URL('../../reference/kernel/values.json', import.meta.url), 'utf8'),
    ) as {
      sets: {
        x: number[];
        y: number[];
        curves: { bandwidth: number; degree: number; low: number; high: number; values: number[] }[];
      }[];
    };
    const grid = unitGrid([0], 60 * 25); // 60 cells, as the reference has
    let compared = 0;
    for (const { x, y, curves } of sets) {
      for (const { bandwidth, degree, low, high, values } of curves) {
        if (degree !== 1) continue;
        const scale = high - low;
        const rows = x.flatMap((place, i) => {
          const at = [(place - low) / scale];
          return at[0] <= 1 + 1e-12 ? [{ place: at, seen: at, z: [1], x: [1], responses: [y[i]] }] : [];
        });
        const { total, counts, ...rest } = collect(grid, rows);
        // The reference bins regressors too: all of a bin's rows stand at its knot.
        const knots = Int32Array.from(counts, (_, knot) => knot);
        const moments: BinnedMoments = {
          ...rest,
          counts,
          rows: knots,
          columns: knots,
          total: { matrix: counts, vector: total.vector },
        };
        const field = noiseField('noise', true, 1);
        const [group] = groupComponents(field, 1);
        const weights = localLinearWeights(
          sumRows(moments, counts, group, grid),
          grid,
          new Float64Array(grid.size).fill(bandwidth / scale),
          knots,
        );
        const [[estimate]] = applyWeights(group, weights, total.vector, grid.size);
        values.forEach((value, i) => expect(estimate[i] / value).toBeCloseTo(1, 6)); // the ridge against singularity
        compared++;
      }
    }
    expect(compared).toBe(4);
  });

  it.each([
    [1, 'scalar'],
    [2, 'scalar'],
    [2, 'axes'],
    [2, 'matrix'],
    [3, 'axes'],
  ])('reproduces lines in every field at once, up to the edges (%i dimensions, %s)', (d, form) => {
    const grid = unitGrid(new Array<number>(d).fill(0), 25 * 6 ** d);
    const stream = randomStream(4, `lines ${d} ${form}`);
    const draw = (): number[] => Array.from({ length: d + 1 }, () => stream.normal());
    const fields: LocalField[] = [vectorField('force', true, d), frictionField(form, true, d)];
    const lines = fields.map((field) => field.components.map(draw));
    const value = (line: readonly number[], place: ArrayLike<number>): number =>
      line.reduce((sum, weight, i) => sum + weight * (i === 0 ? 1 : place[i - 1]), 0);
    const rows = Array.from({ length: 400 * d }, (): Row => {
      const seen = Array.from({ length: d }, () => stream.uniform());
      // binned elsewhere than where the coefficients act, as lagged instruments are
      const place = seen.map((t) => Math.max(0, Math.min(1, t + 0.05 * stream.normal())));
      const velocity = seen.map(() => stream.normal());
      const x = [1, ...velocity];
      const z = [1, ...velocity.map((v) => v + 0.5 * stream.normal())];
      const responses = new Array<number>(d).fill(0);
      fields.forEach((field, f) =>
        field.components.forEach((terms, c) => {
          for (const [target, instrument] of terms)
            responses[target] += x[instrument] * value(lines[f][c], seen);
        }),
      );
      return { place, seen, z, x, responses };
    });
    const moments = collect(grid, rows);
    const windows = createWindows(grid, moments.counts, new Array<number>(d).fill(0.2));
    const smoothers = fields.map((field, f) =>
      createFieldSmoother(moments, field, grid, windows, new Array<number>(d).fill(0.2 + 0.1 * f)),
    );
    const { values, converged } = solveFields(moments, smoothers, moments.total.vector, 1e-12);
    expect(converged).toBe(true);
    fields.forEach((field, f) =>
      field.components.forEach((_, c) => {
        for (const knot of windows.visited) {
          const truth = value(lines[f][c], grid.knots.subarray(knot * d, (knot + 1) * d));
          expect(values[f][c * grid.size + knot]).toBeCloseTo(truth, 5);
        }
      }),
    );
  });

  it('damps a wave on a circle as theory says, and the correction takes that back to fourth order', () => {
    const grid = unitGrid([1], 64 * 25);
    const wave = (t: number): number => Math.cos(2 * Math.PI * t);
    const rows = Array.from({ length: 64 }, (_, i): Row => {
      const place = [i / 64];
      return { place, seen: place, z: [1], x: [1], responses: [wave(i / 64)] };
    });
    const moments = collect(grid, rows);
    const windows = createWindows(grid, moments.counts, [0.1]);
    expect(windows.factors.every((factor) => Math.abs(factor - 1) < 1e-12)).toBe(true);
    const bandwidth = 0.08;
    const smoother = createFieldSmoother(moments, noiseField('noise', true, 1), grid, windows, [bandwidth]);
    // Fourier transform of the normal kernel at one wave per circle; cutting it off at 4 h costs below 1e-4.
    const damping = Math.exp(-((2 * Math.PI * bandwidth) ** 2) / 2);
    const once = smooth(smoother, moments.total.vector);
    const [corrected] = solveFields(moments, [smoother], moments.total.vector).values;
    for (let i = 0; i < 64; i++) {
      expect(Math.abs(once[i] - damping * wave(i / 64))).toBeLessThan(2e-4);
      expect(Math.abs(corrected[i] - (1 - (1 - damping) ** 4) * wave(i / 64))).toBeLessThan(2e-4);
    }
  });

  it('does not notice where a circle is cut', () => {
    const grid = unitGrid([1, 0], 25 * 8 ** 2);
    const stream = randomStream(5, 'circle');
    const rows = Array.from({ length: 500 }, (): Row => {
      const place = [stream.uniform(), stream.uniform()];
      return { place, seen: place, z: [1], x: [1], responses: [stream.normal()] };
    });
    const turned = rows.map((row) => {
      const place = [(row.place[0] + 3 / 8) % 1, row.place[1]];
      return { ...row, place, seen: place };
    });
    const estimate = (data: readonly Row[]): Float64Array => {
      const moments = collect(grid, data);
      const windows = createWindows(grid, moments.counts, [0.1, 0.1]);
      const smoother = createFieldSmoother(moments, noiseField('noise', true, 1), grid, windows, [0.1, 0.15]);
      return solveFields(moments, [smoother], moments.total.vector).values[0];
    };
    const [original, moved] = [estimate(rows), estimate(turned)];
    const perRow = grid.counts[1];
    original.forEach((value, knot) => {
      const [x, y] = [Math.floor(knot / perRow), knot % perRow];
      expect(moved[((x + 3) % 8) * perRow + y]).toBeCloseTo(value, 8);
    });
  });

  it('continues the nearest visited knots where nothing was recorded', () => {
    const grid = unitGrid([0], 25 * 20);
    const rows = Array.from({ length: 200 }, (_, i): Row => {
      const place = [0.3 + (0.4 * (i + 0.5)) / 200];
      return { place, seen: place, z: [1], x: [1], responses: [2 + place[0]] };
    });
    const moments = collect(grid, rows);
    const windows = createWindows(grid, moments.counts, [0.05]);
    const smoother = createFieldSmoother(moments, noiseField('noise', true, 1), grid, windows, [0.05]);
    const [values] = solveFields(moments, [smoother], moments.total.vector).values;
    const [first, last] = [windows.visited[0], windows.visited[windows.visited.length - 1]];
    expect(first).toBeGreaterThan(3);
    for (let knot = 0; knot < first; knot++) expect(values[knot]).toBe(values[first]);
    for (let knot = last + 1; knot < grid.size; knot++) expect(values[knot]).toBe(values[last]);
    expect(values[10]).toBeCloseTo(2.5, 6);
  });
});
