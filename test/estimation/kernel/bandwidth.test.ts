import { describe, expect, it } from 'vitest';
import { MomentCollector, type BinnedMoments } from '../../../src/estimation/kernel/BinnedMoments.js';
import { chooseBandwidth, PARTS } from '../../../src/estimation/kernel/chooseBandwidth.js';
import { measureShares } from '../../../src/estimation/kernel/fewBlocks.js';
import { createKernelGrid, type KernelGrid } from '../../../src/estimation/kernel/grid.js';
import { noiseField } from '../../../src/estimation/kernel/localFields.js';
import { createKnotWeights } from '../../../src/estimation/kernel/motionMoments.js';
import { createWindows, type KnotWindows } from '../../../src/estimation/kernel/windows.js';
import { randomStream } from '../../../src/numerics/random/RandomStream.js';
import { studentQuantile } from '../../../src/numerics/special/student.js';
import { simulateFirstOrder } from '../../support/exactProcesses.js';

const ROWS = 4000;
const NOISE = 0.5;

interface Regression {
  readonly grid: KernelGrid;
  readonly moments: BinnedMoments;
  readonly windows: KnotWindows;
}

/** A plain regression on the unit box, the rows dealt to parts at random. */
function regress(d: number, truth: (place: readonly number[]) => number, seed: number): Regression {
  const tracks = simulateFirstOrder({ tracks: 1, frames: ROWS, dimensions: d, seed: 1 });
  const low = new Array<number>(d).fill(0);
  const grid = createKernelGrid(tracks, { low, high: low.map(() => 1), cells: [], counts: [], threshold: 1 });
  const collector = new MomentCollector(grid.size, 1, 1, PARTS);
  const at = createKnotWeights(grid);
  const stream = randomStream(seed, 'regression');
  const one = Float64Array.of(1);
  for (let row = 0; row < ROWS; row++) {
    const place = low.map(() => stream.uniform());
    at.count = grid.basis.evaluateInto(place, 0, at.indices, at.values);
    const response = truth(place) + NOISE * stream.normal();
    collector.add(row % PARTS, at, at, one, one, Float64Array.of(response));
  }
  const moments = collector.finish();
  return { grid, moments, windows: createWindows(grid, moments.counts, new Array<number>(d).fill(0.1)) };
}

function choose({ grid, moments, windows }: Regression, start: number): number[] {
  const residuals = moments.folds.map((fold) => fold.vector);
  const starts = new Array<number>(grid.dimensions).fill(start);
  return chooseBandwidth(moments, noiseField('noise', true, 1), residuals, grid, windows, starts);
}

describe('the cross-validated bandwidth', () => {
  it('is near the asymptotic optimum where that is known, wherever the search starts', () => {
    const wave = (place: readonly number[]): number => Math.sin(4 * Math.PI * place[0]);
    // h⁵ = σ²/(2√π n ∫m″²) with ∫m″² = (4π)⁴/2
    const optimum = (NOISE ** 2 / (2 * Math.sqrt(Math.PI) * ROWS * ((4 * Math.PI) ** 4 / 2))) ** 0.2;
    const chosen = Array.from({ length: 8 }, (_, seed) => choose(regress(1, wave, seed), 0.05)[0] / optimum);
    const mean = Math.exp(chosen.reduce((sum, ratio) => sum + Math.log(ratio), 0) / chosen.length);
    // Single choices scatter by some 20 %; over eight, three standard errors are 21 %.
    expect(Math.abs(Math.log(mean))).toBeLessThan(0.21);
    const regression = regress(1, wave, 1);
    const near = choose(regression, 0.05)[0];
    for (const start of [0.003, 0.7]) {
      // Starts that are no power of the step apart reach the same minimum up to one fine step.
      expect(Math.abs(Math.log2(choose(regression, start)[0] / near))).toBeLessThan(0.3);
    }
  });

  it('is wide where there is nothing to bend', () => {
    for (const seed of [1, 2, 3, 4]) {
      const [width] = choose(
        regress(1, (place) => 2 - 3 * place[0], seed),
        0.05,
      );
      expect(width).toBeGreaterThan(0.15); // four times the width chosen for the wave
    }
  });

  it('differs between the axes where the coefficient does', () => {
    const [along, across] = choose(
      regress(2, (place) => Math.sin(4 * Math.PI * place[1]), 3),
      0.2,
    );
    expect(across).toBeLessThan(0.12);
    expect(along).toBeGreaterThan(2 * across);
  });
});

describe('where few blocks carry the estimate', () => {
  const blocks = 20;
  const { grid, windows, moments } = regress(1, () => 0, 5);

  it('nothing changes beyond 1/B as long as all blocks are everywhere', () => {
    const counts = Array.from({ length: blocks }, () => moments.counts.map((count) => count / blocks));
    for (const bandwidth of [[0.1], null]) {
      const { leverageFactors, widening } = measureShares(grid, windows, bandwidth, counts);
      for (const factor of leverageFactors) expect(factor).toBeCloseTo(1 / (1 - 1 / blocks), 9);
      for (const ratio of widening) expect(ratio).toBeCloseTo(1, 9);
    }
  });

  it('effects grow with the share of a block and with the lack of others', () => {
    // two blocks on the right quarter, the rest on the left
    const border = Math.floor(0.75 * grid.size);
    const counts = Array.from({ length: blocks }, (_, block) =>
      moments.counts.map((count, knot) => {
        if (knot >= border) return block < 2 ? count / 2 : 0;
        return block < 2 ? 0 : count / (blocks - 2);
      }),
    );
    const { leverageFactors, widening } = measureShares(grid, windows, [0.02], counts);
    const usual = studentQuantile(0.975, blocks - 1);
    const right = grid.size - 3;
    // Two equal blocks: leverage 1/2 each, and one degree of freedom, which is raised to the least that is used.
    expect(leverageFactors[right]).toBeCloseTo(2, 6);
    expect(widening[right]).toBeCloseTo(studentQuantile(0.975, 2) / usual, 6);
    const left = 3;
    expect(leverageFactors[2 * grid.size + left]).toBeCloseTo(1 / (1 - 1 / (blocks - 2)), 6);
    expect(leverageFactors[left]).toBeCloseTo(1, 6);
    expect(widening[left]).toBeCloseTo(studentQuantile(0.975, blocks - 3) / usual, 6);
  });
});
