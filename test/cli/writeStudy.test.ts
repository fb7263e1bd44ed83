/** `fit --write-study`: a study file that repeats the fit it was written by. */

import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { Ajv2020 } from 'ajv/dist/2020.js';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { describeDocuments } from '../../src/documents/jsonSchemas.js';
import { studySchema } from '../../src/documents/Study.js';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

const isStudy = new Ajv2020({ strict: false }).compile(describeDocuments().study);
const read = (name: string): string => readFileSync(join(place.path, name), 'utf8');
const readStudy = (name: string): Record<string, unknown> =>
  JSON.parse(read(name)) as Record<string, unknown>;
const withoutClock = (text: string): string =>
  text.replace(/"created": "[^"]*"/, '').replace(/"timing": \{[^}]*\}/, '');

beforeAll(() => {
  const setting = { tracks: 8, frames: 120, interval: 0.2, dimensions: 1, friction: 1, stiffness: 0.5 };
  const tracks = simulateSecondOrder({ ...setting, localizationError: 0.01, seed: 3 });
  place.write('tracks.csv', [...formatTrackTable(tracks)].join('').replace('track,time,x', 'id,t,x'));
});

const FIT =
  'fit tracks.csv --columns track=id,time=t --force linear --friction constant --noise constant --units um,s --seed 9 --replicates 50';

describe('fit --write-study', () => {
  it('writes all choices, and the file repeats the fit byte by byte', async () => {
    const first = await place.run(`${FIT} --write-study study.json -o fit.json`.split(' '));
    expect(first.status, first.stderr).toBe(0);
    expect(first.stderr).toContain(
      'wrote study.json: every choice of this fit; --study study.json repeats it',
    );
    const study = readStudy('study.json');
    expect(Object.keys(study).sort()).toEqual(Object.keys(studySchema.shape).sort());
    expect(study).toMatchObject({ order: 'second', seed: 9, columns: { track: 'id', time: 't' } });

    const again = await place.run('fit tracks.csv --study study.json -o again.json'.split(' '));
    expect(again.status, again.stderr).toBe(0);
    expect(withoutClock(read('again.json'))).toBe(withoutClock(read('fit.json')));
  });

  it('without tracks writes the choices made so far, the order open', async () => {
    const { status, stdout, stderr } = await place.run(
      'fit --write-study template.json --friction spline:6'.split(' '),
    );
    expect([status, stdout]).toEqual([0, '']);
    expect(stderr).toMatch(/^wanderlaw: wrote template\.json: .*order left to the tracks/);
    expect(readStudy('template.json')).toEqual({ ...studySchema.parse({}), friction: 'spline:6' });
  });

  it('writes what the published schema allows', () => {
    for (const name of ['study.json', 'template.json']) {
      expect(isStudy(readStudy(name)), JSON.stringify(isStudy.errors)).toBe(true);
    }
    expect(isStudy({ ...readStudy('study.json'), replicatse: 1 })).toBe(false); // the check can say no
  });

  it('refuses one file for fit and study, and to overwrite what it reads', async () => {
    const both = await place.run(`${FIT} --write-study a.json -o a.json`.split(' '));
    expect([both.status, both.stderr]).toEqual([
      2,
      'wanderlaw: -o and --write-study both name a.json; give the study a file of its own\n',
    ]);
    const over = await place.run(`${FIT} --study study.json --write-study study.json`.split(' '));
    expect([over.status, over.stderr]).toEqual([
      2,
      'wanderlaw: study.json cannot be written: the same file is read as input; give another place with --write-study\n',
    ]);
  });
});
