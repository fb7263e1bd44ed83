import { describe, expect, it } from 'vitest';
import type { StudyInput } from '../../src/documents/Study.js';
import { QUANTITY_POWERS } from '../../src/units.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { selectTracks } from '../../src/tracks/usableTracks.js';
import { estimateColumns } from '../support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';

/** Rounding, carried through regressions of condition number up to some thousands. */
const ROUNDING = 1e-7;

type Columns = Record<string, Float64Array>;

const RECORDINGS = {
  second: simulateSecondOrder({
    tracks: 32,
    frames: 120,
    dimensions: 2,
    friction: [0.3, 0.4],
    stiffness: [0.05, 0.08],
    localizationError: 0.1,
    seed: 2,
  }),
  first: simulateFirstOrder({
    tracks: 32,
    frames: 120,
    dimensions: 2,
    diffusion: [0.5, 0.8],
    relaxation: 0.1,
    localizationError: 0.2,
    seed: 2,
  }),
};

const SHAPES: readonly [string, StudyInput][] = [
  [
    'constant',
    { force: 'linear', friction: 'constant', noise: 'constant', drift: 'linear', diffusion: 'constant' },
  ],
  [
    'spline',
    { force: 'spline:5', friction: 'spline:4', noise: 'spline:4', drift: 'spline:5', diffusion: 'spline:4' },
  ],
];

const FORMS: StudyInput = { frictionForm: 'axes', noiseForm: 'axes' };

const CASES = (['second', 'first'] as const).flatMap((order) =>
  SHAPES.map(([name, shape]) => [order, name, { ...shape, ...FORMS }] as const),
);

const PLACES = Float64Array.of(0, 0, 1, -0.5, -1.5, 1, 0.4, 1.7);

function movePositions(tracks: TrackSet, move: (value: number, axis: number) => number): TrackSet {
  return { ...tracks, positions: tracks.positions.map((value, i) => move(value, i % 2)) };
}

function powersOf(column: string): readonly [number, number] {
  return QUANTITY_POWERS[column.split('_')[0] as keyof typeof QUANTITY_POWERS];
}

/** Largest difference in units of the column's own size. */
function expectSame(
  found: Columns,
  expected: Columns,
  factor: (column: string) => number,
  tolerance = ROUNDING,
) {
  expect(Object.keys(found)).toEqual(Object.keys(expected));
  for (const [name, values] of Object.entries(expected)) {
    const scale = factor(name);
    const size = Math.max(...values.map(Math.abs)) * Math.abs(scale);
    const difference = Math.max(...found[name].map((value, i) => Math.abs(value - scale * values[i])));
    expect(difference / size, name).toBeLessThan(tolerance);
  }
}

describe.each(CASES)('estimates of %s order, %s', (order, _name, study) => {
  const tracks = RECORDINGS[order];
  const original = estimateColumns(tracks, study, order, PLACES);

  it('carry the units of length and time', () => {
    const [length, time] = [37.3, 0.0041];
    const rescaled: TrackSet = {
      ...movePositions(tracks, (value) => value * length),
      times: tracks.times.map((t) => t * time),
      samplingInterval: tracks.samplingInterval * time,
    };
    const moved = estimateColumns(
      rescaled,
      study,
      order,
      PLACES.map((x) => x * length),
    );
    expectSame(moved, original, (column) => {
      const [lengths, times] = powersOf(column);
      return length ** lengths * time ** times;
    });
  });

  it('move with the origin', () => {
    const shift = [31.7, -8.2];
    const moved = estimateColumns(
      movePositions(tracks, (value, axis) => value + shift[axis]),
      study,
      order,
      PLACES.map((x, i) => x + shift[i % 2]),
    );
    expectSame(moved, original, () => 1);
  });

  it('turn over with an axis: vectors change sign, the rest does not', () => {
    const mirrored = estimateColumns(
      movePositions(tracks, (value, axis) => (axis === 0 ? -value : value)),
      study,
      order,
      PLACES.map((x, i) => (i % 2 === 0 ? -x : x)),
    );
    // The visited box is padded by 1e-9 of its width at its upper end, which the mirror turns into the lower one.
    expectSame(mirrored, original, (column) => (/^(force|drift)_x$/.test(column) ? -1 : 1), 1e-6);
  });

  it('do not depend on the order of the tracks, on their names or on when they were recorded', () => {
    const order_ = Array.from({ length: 32 }, (_, i) => (i * 13 + 5) % 32);
    const shuffled = selectTracks(tracks, order_);
    const renamed: TrackSet = {
      ...shuffled,
      trackNames: shuffled.trackNames.map((name) => `cell ${name}`),
      times: shuffled.times.map((t) => t + 500),
    };
    expectSame(estimateColumns(renamed, study, order, PLACES), original, () => 1);
  });

  it('exchange the axes when the axes are exchanged', () => {
    const positions = tracks.positions.slice();
    for (let i = 0; i < positions.length; i += 2) {
      [positions[i], positions[i + 1]] = [positions[i + 1], positions[i]];
    }
    const places = PLACES.slice();
    for (let i = 0; i < places.length; i += 2) [places[i], places[i + 1]] = [places[i + 1], places[i]];
    const exchanged = estimateColumns({ ...tracks, positions }, study, order, places);
    const other: Record<string, string> = { x: 'y', y: 'x', xx: 'yy', yy: 'xx' };
    const back = Object.fromEntries(
      Object.keys(original).map((name) => {
        const [field, axes] = name.split('_');
        return [name, exchanged[`${field}_${other[axes]}`]];
      }),
    );
    expectSame(back, original, () => 1);
  });
});
