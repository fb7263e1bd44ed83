/**
 * Laws that every estimator keeps at every order, for changes drawn at random: other units, another origin, mirrors,
 * quarter turns, other names, rows in another order, tracks spread over files. From the table to the coefficients.
 */

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { studySchema, type StudyInput } from '../../src/documents/Study.js';
import { chooseEstimator } from '../../src/estimation/choose.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import { importTracks } from '../../src/import/importTracks.js';
import { countTracks, type TrackSet } from '../../src/tracks/TrackSet.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';
import { QUANTITY_POWERS } from '../../src/units.js';
import { evaluateColumns, planColumns } from '../../src/uncertainty/columns.js';
import { sourceOf } from '../import/sources.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';

const RECORDINGS = {
  second: simulateSecondOrder({
    tracks: 30,
    frames: 60,
    dimensions: 2,
    friction: 0.3,
    stiffness: 0.08,
    localizationError: 0.1,
    seed: 8,
  }),
  first: simulateFirstOrder({
    tracks: 30,
    frames: 60,
    dimensions: 2,
    diffusion: 0.5,
    relaxation: 0.1,
    localizationError: 0.2,
    seed: 8,
  }),
};

/** Polynomials of a total degree stay what they are when change; corrections for the interval go axis by axis, so that only
 * quarter turns leave everything as it was. */
const STUDY: StudyInput = {
  force: 'linear',
  friction: 'constant',
  noise: 'linear',
  drift: 'linear',
  diffusion: 'linear',
  localizationError: 0.1,
};

const PLACES = Float64Array.of(0, 0, 1, -0.5, -1.5, 1, 0.4, 1.7);

function estimateColumns(
  tracks: TrackSet,
  input: StudyInput,
  order: 'first' | 'second',
  places: Float64Array,
): Record<string, Float64Array> {
  const study = studySchema.parse(input);
  const plan = planEstimation(tracks, study, order, null, describeVisited(tracks));
  const { model } = chooseEstimator(study.estimator)(tracks, plan);
  const columns = evaluateColumns(model, places);
  return Object.fromEntries(planColumns(model).map(({ name }, index) => [name, columns[index]]));
}

interface Change {
  readonly length: number;
  readonly time: number;
  readonly shift: readonly [number, number];
  readonly mirrored: boolean;
  readonly angle: number;
  readonly files: number;
  readonly order: number;
}

const CHANGES: fc.Arbitrary<Change> = fc.record({
  length: fc.constantFrom(1, 37.3, 2e-6),
  time: fc.constantFrom(1, 0.0041, 900),
  shift: fc.tuple(fc.integer({ min: -50, max: 50 }), fc.integer({ min: -50, max: 50 })),
  mirrored: fc.boolean(),
  angle: fc.integer({ min: 0, max: 3 }).map((quarters) => (quarters * Math.PI) / 2),
  files: fc.integer({ min: 1, max: 3 }),
  order: fc.integer({ min: 0, max: 1e6 }),
});

/** The change of a place: mirror, rotation, shift, unit. */
function movePlaces(places: Float64Array, { length, shift, mirrored, angle }: Change): Float64Array {
  const out = new Float64Array(places.length);
  for (let i = 0; i < places.length; i += 2) {
    const [x, y] = [mirrored ? -places[i] : places[i], places[i + 1]];
    out[i] = length * (Math.cos(angle) * x - Math.sin(angle) * y + shift[0]);
    out[i + 1] = length * (Math.sin(angle) * x + Math.cos(angle) * y + shift[1]);
  }
  return out;
}

/** The changed recording, written as tables with shuffled rows and read back. */
async function changeTracks(tracks: TrackSet, change: Change): Promise<TrackSet> {
  const positions = movePlaces(tracks.positions, change);
  const rows: string[][] = Array.from({ length: change.files }, () => []);
  for (let track = 0; track < countTracks(tracks); track++) {
    const name = `cell ${(track * 7 + change.order) % 1009}`;
    for (let row = tracks.trackOffsets[track]; row < tracks.trackOffsets[track + 1]; row++) {
      const cells = [name, tracks.times[row] * change.time, positions[2 * row], positions[2 * row + 1]];
      rows[track % change.files].push(cells.join(','));
    }
  }
  const sources = rows.map((lines, file) => {
    const stride = 1009; // prime, and no divisor of the number of rows
    const shuffled = lines.map((_, i) => lines[(i * stride + change.order) % lines.length]);
    return sourceOf(`track,time,x,y\n${shuffled.join('\n')}\n`, `part${file}.csv`);
  });
  return (await importTracks(sources)).tracks;
}

function powersOf(column: string): readonly [number, number] {
  return QUANTITY_POWERS[column.split('_')[0] as keyof typeof QUANTITY_POWERS];
}

/** Rounding, carried through the regressions; the likelihood ends its search within this of the top. */
const TOLERANCES = { differences: 1e-7, kernel: 1e-6, likelihood: 1e-3 } as const;

describe.each(['differences', 'kernel', 'likelihood'] as const)('the estimator %s', (estimator) => {
  it.each(['second', 'first'] as const)('keeps the laws at %s order', { timeout: 120_000 }, async (order) => {
    const tracks = RECORDINGS[order];
    const vector = order === 'second' ? 'force' : 'drift';
    const study = { ...STUDY, estimator };
    const original = estimateColumns(tracks, study, order, PLACES);
    const check = async (change: Change): Promise<void> => {
      const { length, time, mirrored, angle } = change;
      const error = STUDY.localizationError as number;
      const found = estimateColumns(
        await changeTracks(tracks, change),
        { ...study, localizationError: error * length },
        order,
        movePlaces(PLACES, change),
      );
      for (const [name, values] of Object.entries(found)) {
        const [lengths, times] = powersOf(name);
        const scale = length ** lengths * time ** times;
        const expected = original[name].map((value, i) => {
          if (!name.startsWith(vector)) return value;
          const [x, y] = [original[`${vector}_x`][i] * (mirrored ? -1 : 1), original[`${vector}_y`][i]];
          return name.endsWith('x')
            ? Math.cos(angle) * x - Math.sin(angle) * y
            : Math.sin(angle) * x + Math.cos(angle) * y;
        });
        const size = Math.max(...expected.map(Math.abs), ...original[name].map(Math.abs));
        const difference = Math.max(...values.map((value, i) => Math.abs(value / scale - expected[i])));
        expect(difference / size, name).toBeLessThan(TOLERANCES[estimator]);
      }
    };
    await fc.assert(fc.asyncProperty(CHANGES, check), {
      seed: 3,
      numRuns: { differences: 8, kernel: 2, likelihood: 3 }[estimator],
      endOnFailure: true,
    });
  });
});
