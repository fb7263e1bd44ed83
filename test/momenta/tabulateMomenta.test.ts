import { describe, expect, it } from 'vitest';
import { surveyTracks } from '../../src/momenta/surveyTracks.js';
import { measureAveraging, tabulateMomenta } from '../../src/momenta/tabulateMomenta.js';
import { simulateSecondOrderPaths } from '../support/exactProcesses.js';
import { makeTrack, makeTracks } from '../support/makeTracks.js';
import { meanOf } from '../support/estimateStudy.js';

/** Averages of the velocity correlation e^{−Γ|t|} over the window by the midpoint rule. */
function averageByMidpoints(friction: number, before: number, after: number) {
  const PANELS = 300;
  const width = (before + after) / PANELS;
  const at = (i: number): number => -before + (i + 0.5) * width;
  let once = 0;
  let twice = 0;
  for (let i = 0; i < PANELS; i++) {
    once += Math.exp(-friction * Math.abs(at(i))) / PANELS;
    for (let k = 0; k < PANELS; k++) twice += Math.exp(-friction * Math.abs(at(i) - at(k))) / PANELS ** 2;
  }
  return { distance: 1 + twice - 2 * once, kept: twice };
}

describe('averaging a velocity over a window', () => {
  it.each([
    [0.3, 1, 1],
    [2, 1, 1],
    [1, 0, 1],
    [0.5, 1, 3],
    [1e-3, 0.3, 0.3],
  ])('is the integral of its correlation (Γ = %s, %s before, %s after)', (friction, before, after) => {
    const found = measureAveraging(friction, before, after);
    const expected = averageByMidpoints(friction, before, after);
    // The kink of the correlation makes the rule err by (Γ width)²/12 of e^{…} per panel pair on the diagonal.
    const error = (friction * (before + after)) / 300;
    expect(Math.abs(found.kept - expected.kept)).toBeLessThan(error);
    expect(Math.abs(found.distance - expected.distance)).toBeLessThan(2 * error);
  });

  it('joins its series smoothly to the closed form', () => {
    const below = measureAveraging(0.999e-3, 0.5, 0.5);
    const above = measureAveraging(1.001e-3, 0.5, 0.5);
    // Distance ≈ Γτ/6 to first order in Γτ, for a symmetric window.
    expect(below.distance).toBeCloseTo(0.999e-3 / 6, 8);
    expect(above.distance).toBeCloseTo(1.001e-3 / 6, 8);
    expect(below.kept - above.kept).toBeCloseTo(0.002e-3 / 3, 9);
  });

  it('of no length changes nothing', () => {
    expect(measureAveraging(1, 0, 0)).toEqual({ distance: 0, kept: 1 });
  });
});

/** A numeric column of the table. */
function readColumn(table: ReturnType<typeof tabulateMomenta>, name: string): number[] {
  const column = table.columns.find((each) => each.name === name);
  if (!column) throw new Error(`no column ${name}`);
  return Array.from(column.values, Number);
}

describe('the table of momenta', () => {
  it.each([
    [0.1, 0.05],
    [0.3, 0.3],
    [1, 0.1],
  ])('states errors as large as they are (ΓΔ = %s, s = %s)', (friction, localizationError) => {
    const { tracks, velocities } = simulateSecondOrderPaths({
      tracks: 40,
      frames: 400,
      friction,
      localizationError,
      lostFrames: 0.05,
      seed: 6,
    });
    const table = tabulateMomenta(tracks, surveyTracks(tracks), 2);
    const momenta = readColumn(table, 'momentum_x');
    const errors = readColumn(table, 'momentum_x_error');
    const squares = momenta.map((p, row) => ((p - 2 * velocities[row]) / errors[row]) ** 2);
    // 16 000 scores, neighbours correlated over some frames: mean square 1 within 3 · √(2 · 5/16 000) and what the
    // survey's own estimates miss by, about 2 %.
    expect(Math.abs(meanOf(squares) - 1)).toBeLessThan(0.075 + 0.04);
    const energies = readColumn(table, 'kinetic_energy');
    const offsets = readColumn(table, 'kinetic_energy_offset');
    const truth = meanOf(Array.from(velocities, (v) => v * v)); // mass 2: m v²/2
    // Energy has relative scatter √2, an independent value every 1/(2Γ) frames.
    const scatter = Math.sqrt(2 / (16_000 * Math.min(1, 2 * friction)));
    expect(Math.abs(meanOf(energies) - meanOf(offsets) - truth)).toBeLessThan(3 * scatter + 0.03);
    expect(table.columns.map(({ name }) => name)).toEqual([
      'track',
      'time',
      'x',
      'averaged_over',
      'momentum_x',
      'momentum_x_error',
      'kinetic_energy',
      'kinetic_energy_error',
      'kinetic_energy_offset',
    ]);
  });

  it('takes secants over neighbours, one-sided at the ends, across gaps', () => {
    const tracks = makeTracks([makeTrack([0, 1, null, 4, 2]), makeTrack([5])]);
    const table = tabulateMomenta(tracks, surveyTracks(tracks), 1);
    expect(readColumn(table, 'momentum_x')).toEqual([1, 4 / 3, 1 / 3, -2, NaN]);
    expect(readColumn(table, 'averaged_over')).toEqual([1, 3, 3, 1, 0]);
  });

  it('uses the errors of the table where it has some', () => {
    const bare = makeTracks([makeTrack([0, 1, 0, 2, 1, 3])]);
    const tracks = { ...bare, localizationErrors: Float64Array.of(0.1, 0.2, 0.3, 0.4, 0.5, 0.6) };
    const errors = readColumn(tabulateMomenta(tracks, surveyTracks(tracks), 1), 'momentum_x_error');
    expect(errors[0]).toBeCloseTo(Math.hypot(0.1, 0.2), 14);
    expect(errors[2]).toBeCloseTo(Math.hypot(0.2, 0.4) / 2, 14);
  });
});
