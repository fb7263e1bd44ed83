import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { importTracks } from '../../src/import/importTracks.js';
import { unwrapInto } from '../../src/import/unwrapPeriodic.js';
import { describeTracks, importText, sourceOf } from './sources.js';

/** Text of any kind a UTF-8 file can hold in a quoted cell; blank names mean a missing name. */
const name = fc
  .string({ unit: 'grapheme', maxLength: 12 })
  .filter((text) => text.trim() !== '' && !text.includes('\0'));
const special = fc.constantFrom(
  'a"b',
  '"',
  'a,b',
  'a;b',
  '\r\n',
  'x\ry',
  '# c',
  ' a',
  'b ',
  '\t7',
  'ä🐛',
  "'",
  '\\"',
);
/** Millionths up to a million: what a recording may hold. Numbers of any size are read in parseNumber.test.ts. */
const number = fc.integer({ min: -1e12, max: 1e12 }).map((millionths) => millionths / 1e6);

interface Row {
  readonly track: string;
  readonly time: number;
  readonly x: number;
  readonly y: number;
}

/** Tables with gaps in which at least one track has two positions and something moves. */
const table = fc
  .uniqueArray(
    fc.oneof(
      name,
      special.filter((text) => text.trim() !== ''),
    ),
    { minLength: 1, maxLength: 5 },
  )
  .chain((names) =>
    fc.uniqueArray(fc.record({ track: fc.constantFrom(...names), frame: fc.nat(30), x: number, y: number }), {
      minLength: 4,
      maxLength: 60,
      selector: ({ track, frame }) => `${frame} ${track}`,
    }),
  )
  .map((rows) => rows.map(({ track, frame, x, y }): Row => ({ track, time: frame * 0.1, x, y })))
  .map((rows): Row[] => [
    { track: 'first', time: 0, x: 1, y: 1 },
    { track: 'first', time: 0.1, x: 2, y: 1 },
    ...rows.filter(({ track }) => track !== 'first'),
  ]);

const quote = (text: string): string => `"${text.replaceAll('"', '""')}"`;

function formatRows(rows: readonly Row[], delimiter = ',', ending = '\n'): string {
  const cells = rows.map(({ track, time, x, y }) => [quote(track), time, x, y].join(delimiter));
  return [['track', 'time', 'x', 'y'].join(delimiter), ...cells].join(ending);
}

describe('laws of the reader', () => {
  it('the order of the rows changes nothing but the order of the tracks', async () => {
    const shuffled = table.chain((rows) =>
      fc.tuple(fc.constant(rows), fc.shuffledSubarray(rows, { minLength: rows.length })),
    );
    await fc.assert(
      fc.asyncProperty(shuffled, async ([rows, others]) => {
        const a = await importText(formatRows(rows));
        const b = await importText(formatRows(others));
        expect(describeTracks(b.tracks)).toEqual(describeTracks(a.tracks));
        expect(b.tracks.samplingInterval).toBe(a.tracks.samplingInterval);
        expect(b.tracks.trackNames).toEqual([...new Set(others.map(({ track }) => track))]);
      }),
      { numRuns: 150 },
    );
  });

  it('the dialect and the size of the chunks change nothing', async () => {
    const dialect = fc.tuple(fc.constantFrom(',', ';', '\t', '|'), fc.constantFrom('\n', '\r\n', '\r'));
    await fc.assert(
      fc.asyncProperty(
        table,
        dialect,
        fc.integer({ min: 1, max: 200 }),
        async (rows, [delimiter, ending], size) => {
          const source = sourceOf(formatRows(rows, delimiter, ending), 'tracks.csv', size);
          const { tracks } = await importTracks([source]);
          expect(describeTracks(tracks)).toEqual(describeTracks((await importText(formatRows(rows))).tracks));
        },
      ),
      { numRuns: 150 },
    );
  });

  it('a track store written as a table is read back to the last bit', async () => {
    await fc.assert(
      fc.asyncProperty(table, async (rows) => {
        const { tracks } = await importText(formatRows(rows));
        const { tracks: again, warnings } = await importText([...formatTrackTable(tracks)].join(''));
        expect(again).toEqual(tracks);
        expect(Buffer.from(again.positions.buffer).equals(Buffer.from(tracks.positions.buffer))).toBe(true);
        expect(warnings.filter(({ code }) => code !== 'uneven-times')).toEqual([]);
      }),
      { numRuns: 150 },
    );
  });
});

describe('unwrapping', () => {
  /** Each position in turn is moved by whole periods to the image nearest to the one before. */
  function unwrapByTrial(wrapped: readonly number[], period: number): number[] {
    const unwrapped = [wrapped[0]];
    for (let i = 1; i < wrapped.length; i++) {
      let best = wrapped[i];
      for (let k = -300; k <= 300; k++) {
        const image = wrapped[i] + k * period;
        if (Math.abs(image - unwrapped[i - 1]) < Math.abs(best - unwrapped[i - 1])) best = image;
      }
      unwrapped.push(best);
    }
    return unwrapped;
  }

  it('moves every position to the image nearest to the one before', () => {
    // Thousandths of the period, none of which is half a period away from another.
    const place = fc.integer({ min: -2499, max: 2499 }).map((k) => (2 * k) / 4001);
    fc.assert(
      fc.property(
        fc.array(place, { minLength: 1, maxLength: 80 }),
        fc.constantFrom(1, 2.5, 0.125),
        (places, period) => {
          const wrapped = places.map((u) => u * period);
          const positions = Float64Array.from(wrapped);
          unwrapInto(positions, Int32Array.of(0, wrapped.length), [period]);
          const expected = unwrapByTrial(wrapped, period);
          positions.forEach((x, i) => {
            expect(Math.abs(x - expected[i])).toBeLessThan(1e-9 * period); // sums of up to 80 periods
          });
        },
      ),
    );
  });

  it('recovers a path whose steps are shorter than half a period, whatever was wrapped', () => {
    const step = fc.double({ min: -0.49, max: 0.49, noNaN: true });
    fc.assert(
      fc.property(fc.array(fc.tuple(step, step), { minLength: 1, maxLength: 50 }), (steps) => {
        const path: number[] = [0.5, 0.5];
        for (const [dx, dy] of steps) path.push(path[path.length - 2] + dx * 3, path[path.length - 2] + dy);
        const wrapped = Float64Array.from(path, (x, i) => (i % 2 === 0 ? x - 3 * Math.floor(x / 3) : x));
        unwrapInto(wrapped, Int32Array.of(0, path.length / 2), [3, 0]);
        wrapped.forEach((x, i) => {
          expect(x).toBeCloseTo(path[i], 9);
        });
      }),
    );
  });

  it('leaves continuous tracks alone, however far they run, and starts anew with each track', () => {
    const path = Float64Array.of(0.9, 1.3, 1.7, 2.1, 2.5, 0.1, 0.9, 1.1);
    unwrapInto(path, Int32Array.of(0, 5, 5, 8), [1]);
    expect(Array.from(path)).toEqual([0.9, 1.3, 1.7, 2.1, 2.5, 0.1, 0.9 - 1, 1.1 - 1]);
  });

  it('takes off several periods at once, and none for a jump of exactly half a period', () => {
    const path = Float64Array.of(0, 3.25, 3.75);
    unwrapInto(path, Int32Array.of(0, 3), [1]);
    expect(Array.from(path)).toEqual([0, 0.25, 0.75]);
  });
});
