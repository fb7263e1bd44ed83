/** The recorded numbers obey the physics that the data sets claim. */

import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { type DataSetName, SETTLING_BEADS } from '../../datasets/truth.js';

/** Accepted distance in standard errors between tracks: about one in 15 000 for a right value. */
const STANDARD_ERRORS = 4;

/** Rows of a table as numbers, grouped by track; a reader of its own, apart from the program's. */
function readByTrack(name: DataSetName, delimiter: string): number[][][] {
  const text = readFileSync(new URL(`../../datasets/${name}/tracks.csv`, import.meta.url), 'utf8');
  const lines = text
    .trimEnd()
    .split('\n')
    .filter((line) => !line.startsWith('#'));
  const tracks = new Map<number, number[][]>();
  for (const line of lines.slice(1)) {
    const row = line.split(delimiter).map((cell) => Number(cell.replace(',', '.')));
    const rows = tracks.get(row[0]) ?? [];
    if (rows.length === 0) tracks.set(row[0], rows);
    rows.push(row);
  }
  return [...tracks.values()];
}

/** Mean over tracks with its standard error from the scatter between them. */
function meanOverTracks(values: readonly number[]): { mean: number; error: number } {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  return { mean, error: Math.sqrt(squares / (values.length - 1) / values.length) };
}

/** ∫ f from low to high by the midpoint rule. */
function integrate(f: (x: number) => number, low: number, high: number, panels = 20_000): number {
  const width = (high - low) / panels;
  let sum = 0;
  for (let i = 0; i < panels; i++) sum += f(low + (i + 0.5) * width);
  return sum * width;
}

/**
 * Drag ratio of a sphere moving towards a plane wall, gap over radius given. Brenner, Chem. Eng. Sci. 16 (1961) 242;
 * Happel & Brenner, Low Reynolds Number Hydrodynamics (1965), eq. 7-4.27; series from memory.
 */
function brennerDragRatio(gap: number): number {
  const alpha = Math.acosh(1 + gap);
  let sum = 0;
  for (let n = 1; n < 2000; n++) {
    const numerator = 2 * Math.sinh((2 * n + 1) * alpha) + (2 * n + 1) * Math.sinh(2 * alpha);
    const denominator = 4 * Math.sinh((n + 0.5) * alpha) ** 2 - (2 * n + 1) ** 2 * Math.sinh(alpha) ** 2;
    const term = ((n * (n + 1)) / ((2 * n - 1) * (2 * n + 3))) * (numerator / denominator - 1);
    sum += term;
    if (n > 5 && Math.abs(term) < 1e-12 * sum) break;
  }
  return (4 / 3) * Math.sinh(alpha) * sum;
}

describe('settling-beads', () => {
  const beads = readByTrack('settling-beads', ';').map((rows) => rows.map((row) => row[2]));
  const { radius, free } = SETTLING_BEADS.parameters;

  test("the true diffusion stays within 1 % of Brenner's series at every height the beads visit", () => {
    for (const gap of [0.03, 0.05, 0.1, 0.2, 0.5, 1, 2, 4, 8]) {
      const ratio = (SETTLING_BEADS.diffusion([gap * radius]) / free) * brennerDragRatio(gap);
      expect(Math.abs(ratio - 1), `gap ${gap} radii`).toBeLessThan(0.01);
    }
  });

  // Limits of the series, from memory: Faxén 1922, D/D₀ → 1 − (9/8) a/l with l from centre to wall; lubrication
  // (Taylor), drag ratio → a/gap. The true diffusion itself tends to 1 − (7/6) a/gap: 4 % more hindrance far away.
  test('the series tends to the wall correction of Faxén far away and to lubrication at contact', () => {
    expect((1 - 1 / brennerDragRatio(200)) * 201).toBeCloseTo(9 / 8, 2);
    expect(brennerDragRatio(1e-3) * 1e-3).toBeCloseTo(1, 2);
  });

  test('the true drift is the one of thermal equilibrium: no probability flows', () => {
    // Itô at one temperature: D ρ has the derivative μ ρ when ρ = exp(−U).
    for (const x of [1.5e-7, 4e-7, 1e-6, 3e-6]) {
      const step = 1e-4 * x;
      const weighted = (place: number): number =>
        SETTLING_BEADS.diffusion([place]) *
        Math.exp(SETTLING_BEADS.potential([x]) - SETTLING_BEADS.potential([place]));
      const derivative = (weighted(x + step) - weighted(x - step)) / (2 * step);
      // central differences: relative error of order (step/shortest length)² < 1e-5, of the larger of both terms
      const size = SETTLING_BEADS.diffusionSlope([x]);
      expect(Math.abs(derivative - SETTLING_BEADS.drift([x])[0])).toBeLessThan(1e-4 * size);
    }
  });

  test('all recorded heights lie above the floor', () => {
    expect(Math.min(...beads.flat())).toBeGreaterThan(0);
  });

  test('heights follow the law of Boltzmann, exp(−U/kT)', () => {
    const density = (x: number): number => Math.exp(-SETTLING_BEADS.potential([x]));
    const total = integrate(density, 0, 4e-5);
    for (const height of [3e-7, 6e-7, 1e-6, 2e-6, 4e-6]) {
      const expected = integrate(density, 0, height) / total;
      const below = meanOverTracks(beads.map((rows) => rows.filter((x) => x < height).length / rows.length));
      expect(Math.abs(below.mean - expected), `below ${height} m`).toBeLessThan(
        STANDARD_ERRORS * below.error,
      );
    }
    const mean = meanOverTracks(beads.map((rows) => rows.reduce((sum, x) => sum + x, 0) / rows.length));
    const expected = integrate((x) => x * density(x), 0, 4e-5) / total;
    expect(Math.abs(mean.mean - expected)).toBeLessThan(STANDARD_ERRORS * mean.error);
  });

  test('a displacement per frame is small against the height scale', () => {
    const squares = beads.flatMap((rows) => rows.slice(1).map((x, i) => (x - rows[i]) ** 2));
    const perFrame = Math.sqrt(squares.reduce((sum, value) => sum + value, 0) / squares.length);
    expect(perFrame / SETTLING_BEADS.parameters.scale).toBeLessThan(0.1);
  });
});

describe('felt-table', () => {
  const interval = 0.05;
  const steps = readByTrack('felt-table', ',').map((rows) =>
    rows.slice(1).map((row, i) => ({
      x: (row[2] + rows[i][2]) / 2,
      y: (row[3] + rows[i][3]) / 2,
      vx: (row[2] - rows[i][2]) / interval,
      vy: (row[3] - rows[i][3]) / interval,
    })),
  );

  test('pucks are less than half as agitated on the felt as on the bare table', () => {
    const all = steps.flat();
    const energy = (chosen: typeof all): number =>
      chosen.reduce((sum, { vx, vy }) => sum + vx * vx + vy * vy, 0) / chosen.length;
    const onFelt = energy(all.filter(({ x }) => Math.abs(x - 0.05) < 0.05));
    expect(onFelt).toBeLessThan(0.5 * energy(all.filter(({ x }) => x < -0.25)));
  });

  test('the fan carries the pucks round anticlockwise', () => {
    const turns = steps.map((track) => {
      const near = track.filter(({ x, y }) => Math.hypot(x + 0.2, y - 0.05) < 0.3);
      return near.reduce((sum, { x, y, vx, vy }) => sum + (x + 0.2) * vy - (y - 0.05) * vx, 0) / track.length;
    });
    const { mean, error } = meanOverTracks(turns);
    expect(mean).toBeGreaterThan(STANDARD_ERRORS * error);
  });
});

describe('stripe-cells', () => {
  const period = 40;
  const cells = readByTrack('stripe-cells', ',').map((rows) => rows.sort((a, b) => a[1] - b[1]));

  test('places across the stripes lie within one period', () => {
    const ys = cells.flat().map((row) => row[3]);
    expect(Math.min(...ys)).toBeGreaterThanOrEqual(0);
    expect(Math.max(...ys)).toBeLessThan(period);
  });

  test('about one frame of ten is missing and no cell can have crossed half a period unseen', () => {
    let missing = 0;
    let frames = 0;
    let farthest = 0;
    for (const rows of cells) {
      frames += rows[rows.length - 1][1] - rows[0][1] + 1;
      missing += rows[rows.length - 1][1] - rows[0][1] + 1 - rows.length;
      for (let i = 1; i < rows.length; i++) {
        const step = rows[i][3] - rows[i - 1][3];
        farthest = Math.max(farthest, Math.abs(step - period * Math.round(step / period)));
      }
    }
    expect(missing / frames).toBeGreaterThan(0.09);
    expect(missing / frames).toBeLessThan(0.11);
    // Steps stop well short of half a period, where unwrapping would become a guess.
    expect(farthest).toBeLessThan(0.4 * period);
  });

  test('cells keep to the stripes and have no direction along them', () => {
    const onStripe = meanOverTracks(
      cells.map((rows) => rows.filter((row) => Math.abs(row[3] - 20) < 10).length / rows.length),
    );
    expect(onStripe.mean - 0.5).toBeGreaterThan(STANDARD_ERRORS * onStripe.error);
    const along = meanOverTracks(
      cells.map((rows) => (rows[rows.length - 1][2] - rows[0][2]) / (rows[rows.length - 1][1] - rows[0][1])),
    );
    expect(Math.abs(along.mean)).toBeLessThan(STANDARD_ERRORS * along.error);
  });
});
