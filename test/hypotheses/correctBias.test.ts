import { describe, expect, it } from 'vitest';
import { DataError } from '../../src/errors.js';
import type { Model } from '../../src/fields/CoefficientField.js';
import type { Contrasts } from '../../src/hypotheses/contrasts.js';
import { correctBias } from '../../src/hypotheses/correctBias.js';
import type { OccupancyModes } from '../../src/hypotheses/occupancyModes.js';
import { createUniformStatement } from '../../src/hypotheses/uniformStatement.js';

/** A friction whose logarithm is a polynomial of degree 2. */
function frictionOf(coefficients: readonly number[]): Model {
  const constant = { basis: { kind: 'constant' as const }, form: 'scalar' as const };
  return {
    order: 'second',
    dimensions: 1,
    periods: [0],
    force: { ...constant, name: 'force', form: 'axes', link: 'identity', coefficients: [[0]] },
    noise: { ...constant, name: 'noise', link: 'log', coefficients: [[0]] },
    friction: {
      name: 'friction',
      form: 'scalar',
      link: 'log',
      basis: { kind: 'polynomial', degree: 2, centre: [0], scale: [1] },
      coefficients: [[...coefficients]],
    },
  } as unknown as Model;
}

describe('the bias of contrasts', () => {
  const nodes = Float64Array.of(-1, 0, 1);
  const modes: OccupancyModes = {
    count: 2,
    atNodes: [Float64Array.of(1, 1, 1), Float64Array.of(-1, 0, 1)],
  } as unknown as OccupancyModes;
  const imposed = frictionOf([0.5, 0, 0]);
  const statement = createUniformStatement(imposed, ['friction_xx']);
  const contrasts = {
    columnCount: 1,
    modeCount: 2,
    extraCount: 0,
    values: Float64Array.of(0.7, 0.4),
    covariance: Float64Array.of(1, 0.2, 0.2, 2),
    blocks: 50,
  } as unknown as Contrasts;
  const problem = { statement, contrasts, nodes, modes, modeCount: 2 };

  it('is what estimates from simulated recordings are off by on the mean', () => {
    // Off by 0.1 + 0.3 x and by 0.3 + 0.1 x: on the mean 0.2 + 0.2 x, against the modes 0.2 and 0.2 · 2/3.
    const found = correctBias(
      problem,
      imposed,
      (index) => frictionOf([0.6 + 0.2 * index, 0.3 - 0.2 * index, 0]),
      2,
    );
    expect(found?.values[0]).toBeCloseTo(0.7 - 0.2, 12);
    expect(found?.values[1]).toBeCloseTo(0.4 - (0.2 * 2) / 3, 12);
    // The mean of two is itself uncertain by half the covariance.
    expect(Array.from(found?.covariance ?? [])).toEqual([1.5, 0.30000000000000004, 0.30000000000000004, 3]);
  });

  it('leaves out recordings that no estimate can be made from', () => {
    const estimate = (index: number): Model => {
      if (index > 0) throw new DataError('nothing moves');
      return frictionOf([0.6, 0, 0]);
    };
    expect(correctBias(problem, imposed, estimate, 3)?.values[0]).toBeCloseTo(0.6, 12);
    expect(
      correctBias(
        problem,
        imposed,
        () => {
          throw new DataError('nothing moves');
        },
        3,
      ),
    ).toBeNull();
  });
});
