/** Tables and documents that are large, odd or made to do harm: taken as they are, or refused in one sentence. */

import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { fitSchema, type FitDocument } from '../../src/documents/FitDocument.js';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

const TRACKS = simulateSecondOrder({
  tracks: 32,
  frames: 60,
  interval: 0.125,
  friction: 2,
  stiffness: 1,
  localizationError: 0.05,
  startSpread: 1,
  seed: 11,
});

const SHAPES = ['--order', 'second', '--estimator', 'differences', '--force', 'linear'];
const CONSTANTS = ['--friction', 'constant', '--noise', 'constant', '--replicates', '20'];

function tableOf(tracks: TrackSet): string {
  return [...formatTrackTable(tracks)].join('');
}

async function fit(table: string, ...more: string[]): Promise<FitDocument> {
  place.write('tracks.csv', table);
  const { status, stderr } = await place.run([
    'fit',
    'tracks.csv',
    ...SHAPES,
    ...CONSTANTS,
    ...more,
    '-o',
    'fit.json',
  ]);
  expect([status, stderr]).toEqual([0, expect.stringMatching(/wrote fit\.json/)]);
  return fitSchema.parse(JSON.parse(readFileSync(join(place.path, 'fit.json'), 'utf8'))) as FitDocument;
}

const frictionOf = ({ model }: FitDocument): number =>
  model.order === 'second' ? model.friction.coefficients[0][0] : NaN;

describe('odd recordings', () => {
  let plain: number;
  beforeAll(async () => {
    plain = frictionOf(await fit(tableOf(TRACKS)));
  });

  it.each([2 ** -40, 2 ** 40])('are fitted alike with times of another size (factor %s)', async (factor) => {
    const scaled = { ...TRACKS, times: TRACKS.times.map((time) => time * factor) };
    const friction = frictionOf(await fit(tableOf(scaled)));
    expect(Math.abs((friction * factor) / plain - 1)).toBeLessThan(1e-6);
  });

  it('are fitted alike far from the origin, as far as the digits go', async () => {
    const moved = { ...TRACKS, positions: TRACKS.positions.map((x) => x + 1e9) };
    // Positions are then rounded to 1e-7, a hundred thousandth of the displacement per frame.
    expect(Math.abs(frictionOf(await fit(tableOf(moved))) / plain - 1)).toBeLessThan(1e-3);
  });

  it('are fitted where tracks have different intervals, with the usual one', async () => {
    const times = TRACKS.times.map((time, i) => (i >= 24 * 60 ? 2 * time : time));
    const friction = frictionOf(await fit(tableOf({ ...TRACKS, times })));
    expect(friction).toBeGreaterThan(0.5 * plain);
    expect(friction).toBeLessThan(2 * plain);
  });

  it('may have ten thousand columns', async () => {
    const names = Array.from({ length: 10_000 }, (_, i) => `c${i}`).join(',');
    const values = new Array<number>(10_000).fill(1).join(',');
    const rows = Array.from({ length: 30 }, (_, k) => `1,${k},${(k * k) % 7},${values}`);
    place.write('wide.csv', [`track,time,x,${names}`, ...rows, ''].join('\n'));
    const { status, stdout } = await place.run(['survey', 'wide.csv', '--json']);
    expect(status).toBe(0);
    expect(JSON.parse(stdout)).toMatchObject({ tracks: 1, positions: 30 });
  });

  it('are refused where a line does not end', async () => {
    place.write('line.csv', `track,time,x\n1,0,0\n1,1,${'9'.repeat(3_000_000)}\n1,2,3\n`);
    const { status, stderr } = await place.run(['survey', 'line.csv']);
    expect(status).toBe(3);
    expect(stderr).toMatch(
      /^wanderlaw: line\.csv line 3: the line does not end within a million characters[^\n]*\n$/,
    );
  });
});

describe('names made to do harm', () => {
  beforeAll(async () => {
    await fit(tableOf(TRACKS));
  });

  it.each([
    ['a study', ['fit', 'tracks.csv', '--study', 'bad.json'], '{"seed": 3, "columns": {"__proto__": "x"}}'],
    ['a study, escaped', ['fit', 'tracks.csv', '--study', 'bad.json'], '{"\\u005f_proto__": {"seed": 4}}'],
    ['a scenario', ['simulate', 'bad.json', '-o', 'out.csv'], '{"parameters": {"__proto__": 1}}'],
    ['a fit file', ['evaluate', 'bad.json', '--at', 'tracks.csv'], '{"model": {"__proto__": {}}}'],
  ])('are refused in %s', async (_title, line, text) => {
    place.write('bad.json', text);
    const { status, stderr } = await place.run(line);
    expect(status).toBe(2);
    expect(stderr).toMatch(/^wanderlaw: bad\.json: "__proto__" is not a key of a [^\n]*\n$/);
    expect(Object.keys(Object.prototype)).toEqual([]);
  });

  it.each(['__proto__=x', 'constructor=x', 'toString=x'])('are no roles of columns: %s', async (columns) => {
    const { status, stderr } = await place.run(['fit', 'tracks.csv', '--columns', columns]);
    expect(status).toBe(2);
    expect(stderr).toMatch(/^wanderlaw: --columns: "[^"]*" is not a role [^\n]*\n$/);
  });

  it.each(['x.constructor', 'toString(x)', 'constructor(x)', 'x["y"]', 'g0 = 3'])(
    'do not reach out of a formula: %s',
    async (law) => {
      const test = ['test', 'fit.json', '--hypothesis', 'law', '--field', 'friction', '--law', law];
      const { status, stderr } = await place.run(test);
      expect(status).toBe(2);
      expect(stderr).toMatch(/^wanderlaw: [^\n]*formula[^\n]*\n$/);
    },
  );

  it.each(['/dev/zero', 'a\0b', '../'.repeat(40)])(
    'do not make a fit read what is no file of tracks: %j',
    async (path) => {
      const document = JSON.parse(readFileSync(join(place.path, 'fit.json'), 'utf8')) as FitDocument;
      place.write('bad.json', JSON.stringify({ ...document, sources: [{ ...document.sources[0], path }] }));
      const { status, stderr } = await place.run(['resimulate', 'bad.json']);
      expect(status).toBe(3);
      expect(stderr).toMatch(
        /from which the fit was made, is not there; say with --tracks where it is now\n$/,
      );
    },
  );

  it('notice that the tracks have changed since the fit', async () => {
    place.write('tracks.csv', `${tableOf(TRACKS)}99,0,0\n`);
    const { status, stderr } = await place.run(['resimulate', 'fit.json']);
    expect(status).toBe(3);
    expect(stderr).toMatch(/tracks\.csv is not the file the fit was made from \(SHA-256/);
  });
});

describe('the number of workers', () => {
  it('changes no byte of what is simulated or compared', async () => {
    await fit(tableOf(TRACKS));
    await place.run(['scenario', 'fit.json', '-o', 'scenario.json']);
    const results: string[] = [];
    for (const workers of ['1', '2', '5']) {
      const runs = ['--workers', workers];
      await place.run(['simulate', 'scenario.json', '--tracks', '7', '-o', 'out.csv', ...runs]);
      const { status, stdout } = await place.run([
        'resimulate',
        'fit.json',
        '--replicates',
        '19',
        '--json',
        ...runs,
      ]);
      expect(status).toBe(0);
      results.push(readFileSync(join(place.path, 'out.csv'), 'utf8') + stdout);
    }
    expect(results[1]).toBe(results[0]);
    expect(results[2]).toBe(results[0]);
  });
});
