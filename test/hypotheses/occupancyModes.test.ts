import { describe, expect, it } from 'vitest';
import { findOccupancyModes } from '../../src/hypotheses/occupancyModes.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import type { VisitedRegion } from '../../src/tracks/visitedRegion.js';

/** A region of one axis with counts proportional to a density. */
function regionOf(low: number, high: number, density: (x: number) => number): VisitedRegion {
  const cells = 64;
  const counts = Array.from({ length: cells }, (_, cell) =>
    Math.round(1000 * density(low + ((cell + 0.5) / cells) * (high - low))),
  );
  return { low: [low], high: [high], cells: [cells], counts, threshold: 1 };
}

const spline = (count: number, low: number, high: number, period = 0) =>
  ({ kind: 'spline', counts: [count], low: [low], high: [high], periods: [period] }) as const;

function meanProduct(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
  return sum / a.length;
}

describe('occupancy modes', () => {
  it('are orthonormal over the visited places, the first constant', () => {
    const stream = randomStream(1, 'nodes');
    const nodes = Float64Array.from({ length: 500 }, () => stream.normal());
    const region = regionOf(-3.5, 3.5, (x) => Math.exp((-x * x) / 2));
    const { atNodes, count } = findOccupancyModes(spline(14, -3.5, 3.5), nodes, region, 8);
    expect(count).toBe(8);
    expect(atNodes[0].every((value) => value === 1)).toBe(true);
    for (let i = 0; i < count; i++) {
      // the ridge of 1e-9 that holds unreached functions shows in the last digits
      for (let j = 0; j < count; j++)
        expect(meanProduct(atNodes[i], atNodes[j])).toBeCloseTo(i === j ? 1 : 0, 5);
    }
  });

  it('are cosines where a stretch is visited evenly', () => {
    const nodes = Float64Array.from({ length: 1000 }, (_, i) => (i + 0.5) / 1000);
    const { atNodes } = findOccupancyModes(
      spline(20, 0, 1),
      nodes,
      regionOf(0, 1, () => 1),
      5,
    );
    for (let mode = 1; mode < 5; mode++) {
      const cosine = nodes.map((x) => Math.SQRT2 * Math.cos(mode * Math.PI * x));
      // cubic splines with 17 cells follow four half waves to about 1e-3
      expect(Math.abs(meanProduct(atNodes[mode], cosine))).toBeGreaterThan(0.998);
    }
  });

  it('stay bounded where the edges are hardly visited', () => {
    const stream = randomStream(2, 'nodes');
    const nodes = Float64Array.from({ length: 1000 }, () => stream.normal());
    const region = regionOf(-3.5, 3.5, (x) => Math.exp((-x * x) / 2));
    const { atNodes } = findOccupancyModes(spline(14, -3.5, 3.5), nodes, region, 6);
    // Hermite polynomials of that order reach 15 at the outermost nodes; cosines of ranks stay at √2
    for (const values of atNodes) expect(Math.max(...values.map(Math.abs))).toBeLessThan(4);
  });

  it('close on themselves along a periodic axis', () => {
    const nodes = Float64Array.from({ length: 1000 }, (_, i) => (2 * Math.PI * (i + 0.5)) / 1000);
    const modes = findOccupancyModes(
      spline(14, 0, 2 * Math.PI, 2 * Math.PI),
      nodes,
      regionOf(0, 2 * Math.PI, () => 1),
      5,
    );
    const [start, end] = [1e-6, 2 * Math.PI - 1e-6].map((x) => modes.evaluate(Float64Array.of(x)));
    for (let mode = 0; mode < 5; mode++) expect(end[mode][0]).toBeCloseTo(start[mode][0], 4);
    // modes 1 and 2 span cos x and sin x
    const cosine = nodes.map((x) => Math.SQRT2 * Math.cos(x));
    const caught = meanProduct(modes.atNodes[1], cosine) ** 2 + meanProduct(modes.atNodes[2], cosine) ** 2;
    expect(caught).toBeGreaterThan(0.999);
  });

  it('are the same at the nodes, evaluated there', () => {
    const nodes = Float64Array.from({ length: 200 }, (_, i) => (i + 0.5) / 200);
    const modes = findOccupancyModes(
      spline(10, 0, 1),
      nodes,
      regionOf(0, 1, () => 1),
      6,
    );
    modes.evaluate(nodes).forEach((values, mode) => expect(values).toEqual(modes.atNodes[mode]));
  });
});
