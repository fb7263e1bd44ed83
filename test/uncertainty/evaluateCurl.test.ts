/** The curl of a fitted force against fields whose curl is known. */

import { describe, expect, test } from 'vitest';
import type { FitDocument } from '../../src/documents/FitDocument.js';
import { createModelEvaluator } from '../../src/fields/evaluateModel.js';
import { evaluateCurl } from '../../src/uncertainty/evaluateCurl.js';
import { gelFit, stripeFit, tableFit } from '../pages/pageFits.js';

/** A force that is linear in place on every axis: F = M q, in polynomials of degree 1 (1, y/s, x/s with scale s). */
function linearFit(matrix: readonly (readonly number[])[], scatter: number): FitDocument {
  const fit = tableFit();
  if (fit.model.order !== 'second') throw new Error('the table is of second order');
  const scale = 2;
  const coefficients = matrix.map((row) => [0.3, row[1] * scale, row[0] * scale]);
  const rest = [fit.model.friction, fit.model.noise].flatMap((field) => field.coefficients.flat());
  const flat = coefficients.flat();
  // Replicates come in pairs on either side of the estimate, moved in the coefficient of F_y along x alone.
  const moved = (sign: number) => flat.map((value, i) => (i === 5 ? value + sign * scatter * scale : value));
  return {
    ...fit,
    model: {
      ...fit.model,
      force: {
        ...fit.model.force,
        basis: { kind: 'polynomial', degree: 1, centre: [0, 0], scale: [scale, scale] },
        coefficients,
      },
    },
    uncertainty: {
      ...fit.uncertainty,
      replicates: [
        [...moved(1), ...rest],
        [...moved(-1), ...rest],
      ],
    },
  };
}

const PLACES = Float64Array.from([-1, -0.5, 0.2, 0.7, 0.9, -0.3]);

describe('curl of the force', () => {
  test('of a linear force is M_yx − M_xy everywhere, its half-width multiplier × scatter', () => {
    const fit = linearFit(
      [
        [-1, -0.4],
        [0.7, -2],
      ],
      0.05,
    );
    const { values, low, high } = evaluateCurl(fit, PLACES, 0, 1);
    const half = 0.05 * fit.uncertainty.multiplier;
    for (let i = 0; i < 3; i++) {
      expect(values[i]).toBeCloseTo(1.1, 12);
      expect(low[i]).toBeCloseTo(1.1 - half, 12);
      expect(high[i]).toBeCloseTo(1.1 + half, 12);
    }
  });

  test('changes sign with the order of the axes, and is zero for a force with a potential', () => {
    const turning = linearFit(
      [
        [-1, -0.4],
        [0.7, -2],
      ],
      0.05,
    );
    const [there, back] = [evaluateCurl(turning, PLACES, 0, 1), evaluateCurl(turning, PLACES, 1, 0)];
    expect(Array.from(back.values)).toEqual(Array.from(there.values, (value) => -value));
    const still = evaluateCurl(
      linearFit(
        [
          [-1, 0.6],
          [0.6, -2],
        ],
        0.05,
      ),
      PLACES,
      0,
      1,
    );
    for (const value of still.values) expect(value).toBeCloseTo(0, 12);
  });

  test('agrees with central differences of the spline force, periodic axes included', () => {
    for (const fit of [tableFit(), stripeFit(), gelFit()]) {
      const { model } = fit;
      if (model.order !== 'second') throw new Error('all of second order');
      const d = model.dimensions;
      const place = Float64Array.from(
        fit.visited.low,
        (low, axis) => low * 0.4 + fit.visited.high[axis] * 0.6,
      );
      const [a, b] = [0, d - 1];
      const h = 1e-4 * (fit.visited.high[0] - fit.visited.low[0]);
      const evaluator = createModelEvaluator(model);
      const slope = (component: number, axis: number) => {
        const [below, above] = [-h, h].map((shift) => {
          const moved = place.slice();
          moved[axis] += shift;
          const force = new Float64Array(d);
          evaluator.forceInto(moved, 0, force);
          return force[component];
        });
        return (above - below) / (2 * h);
      };
      const expected = slope(b, a) - slope(a, b);
      const { values } = evaluateCurl(fit, place, a, b);
      // differences err by h²/6 of the third derivative: h is 1e-4 of a box some ten spline cells wide
      expect(Math.abs(values[0] - expected)).toBeLessThan(1e-4 * Math.max(1, Math.abs(expected)));
    }
  });
});
