import { describe, expect, it } from 'vitest';
import type { Estimate } from '../../src/estimation/Estimate.js';
import { drawReplicates } from '../../src/uncertainty/bootstrap.js';
import { measureDistance } from '../../src/uncertainty/scales.js';
import { measureSpread, pointwiseMultiplier } from '../../src/uncertainty/spread.js';
import { CONSTANT, estimateStudy } from '../support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { exampleFit } from '../support/fitFixtures.js';

/** An estimate of one parameter with given block influences and smoothing bias. */
function estimateOf(influences: readonly number[], bias = 0): Estimate {
  return {
    model: exampleFit().model,
    parameters: Float64Array.of(5),
    influences: Float64Array.from(influences),
    smoothingFactor: bias > 0 ? { values: Float64Array.of(bias), columns: 1 } : null,
    toModelParameters: (raw) => raw,
    localizationError: [],
    diagnostics: {},
    warnings: [],
  };
}

function deviationFrom(values: readonly number[], centre: number): number {
  return Math.sqrt(values.reduce((sum, value) => sum + (value - centre) ** 2, 0) / values.length);
}

describe('replicates', () => {
  const influences = Array.from({ length: 20 }, (_, i) => Math.sin(7 * i) * 0.1);
  const centred = influences.map((value) => value - influences.reduce((a, b) => a + b, 0) / 20);

  it('depend on the seed and nothing else, and the first do not depend on how many are drawn', () => {
    const estimate = estimateOf(centred, 0.1);
    const few = drawReplicates(estimate, 20, 3);
    expect(drawReplicates(estimate, 20, 3)).toEqual(few);
    expect(drawReplicates(estimate, 50, 3).slice(0, 20)).toEqual(few);
    expect(drawReplicates(estimate, 20, 4)).not.toEqual(few);
  });

  it('scatter about the estimate as the blocks do: variance B/(B − 1) Σ influence²', () => {
    const count = 20_000;
    const values = drawReplicates(estimateOf(centred), count, 1).map(([value]) => value);
    const expected = Math.sqrt((20 / 19) * centred.reduce((sum, value) => sum + value ** 2, 0));
    // relative standard error of a standard deviation: 1/√(2n) = 0.5 %
    expect(Math.abs(deviationFrom(values, 5) / expected - 1)).toBeLessThan(4 * 0.005);
    const mean = values.reduce((sum, value) => sum + value, 0) / count;
    expect(Math.abs(mean - 5)).toBeLessThan((4 * expected) / Math.sqrt(count));
  });

  it('add the smoothing bias in squares', () => {
    const values = drawReplicates(estimateOf(centred, 0.7), 20_000, 1).map(([value]) => value);
    const blocks = (20 / 19) * centred.reduce((sum, value) => sum + value ** 2, 0);
    expect(Math.abs(deviationFrom(values, 5) / Math.sqrt(blocks + 0.49) - 1)).toBeLessThan(4 * 0.005);
  });
});

describe('coverage', () => {
  const STUDIES = 150;

  // Of 150 intervals of true coverage 95 % fewer than 133 cover with probability 0.05 % (binomial), all of them with
  // 0.05 %; a true coverage of 85 % would reach 133 with 12 %, one of 80 % with 0.4 %.
  const FEWEST = 133;

  it.each([
    ['second order', 40, 100],
    ['second order', 5, 800],
    ['first order', 40, 60],
    ['first order', 5, 600],
  ] as const)(
    'of 95 % intervals, constant coefficients, %s, %i tracks of %i frames',
    (order, tracks, frames) => {
      const covered: Record<string, number> = {};
      const second = order === 'second order';
      const truth: Record<string, number> = second
        ? { force_x: 0.1, friction_xx: 0.3, noise_xx: 0.6, temperature_xx: 1 }
        : { drift_x: 0.1, diffusion_xx: 0.5 };
      for (let seed = 1; seed <= STUDIES; seed++) {
        const recording = second
          ? simulateSecondOrder({ tracks, frames, friction: 0.3, force: 0.1, localizationError: 0.1, seed })
          : simulateFirstOrder({ tracks, frames, diffusion: 0.5, drift: 0.1, localizationError: 0.3, seed });
        const { estimate, plan } = estimateStudy(
          recording,
          CONSTANT,
          second ? 'second' : 'first',
          second ? 3.3 : null,
        );
        const replicates = drawReplicates(estimate, 200, seed);
        const multiplier = pointwiseMultiplier(0.95, plan.blocks.count, 200);
        for (const { name, scale, values, deviations } of measureSpread(
          estimate.model,
          replicates,
          Float64Array.of(0),
        )) {
          const distance = measureDistance(scale, values[0], truth[name]);
          covered[name] = (covered[name] ?? 0) + (Math.abs(distance) <= multiplier * deviations[0] ? 1 : 0);
        }
      }
      expect(Object.keys(covered)).toEqual(Object.keys(truth));
      for (const [name, count] of Object.entries(covered)) {
        expect.soft(count, name).toBeGreaterThanOrEqual(FEWEST);
        expect.soft(count, name).toBeLessThan(STUDIES);
      }
    },
  );
});
