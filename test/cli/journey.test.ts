import { readFileSync, renameSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { type Outcome, Workplace } from './runInProcess.js';

/** Simple shapes keep each step of the journey short. */
const FIT = 'fit tracks.csv --force linear --friction constant --noise constant --replicates 60 --units um,s';

const place = new Workplace();
afterAll(() => place.remove());

const type = (line: string, more: readonly string[] = []): Promise<Outcome> =>
  place.run([...line.split(' '), ...more]);
const readJson = (name: string): Record<string, unknown> =>
  JSON.parse(readFileSync(join(place.path, name), 'utf8')) as Record<string, unknown>;
const withoutClock = (text: string): string =>
  text.replace(/"created": "[^"]*"/, '').replace(/"timing": \{[^}]*\}/, '');
const readWithoutClock = (name: string): string => withoutClock(readFileSync(join(place.path, name), 'utf8'));

beforeAll(async () => {
  const tracks = simulateSecondOrder({
    tracks: 12,
    frames: 250,
    interval: 0.2,
    dimensions: 1,
    friction: 1,
    stiffness: 0.5,
    localizationError: 0.01,
    seed: 5,
  });
  place.write('tracks.csv', [...formatTrackTable(tracks)].join(''));
  const { status, stderr } = await type(`${FIT} -o fit.json --quiet`);
  expect([status, stderr]).toEqual([0, '']);
});

describe('survey', () => {
  it('prints the promised keys as JSON', async () => {
    const { status, stdout } = await type('survey tracks.csv --json');
    expect(status).toBe(0);
    const survey = JSON.parse(stdout) as Record<string, unknown>;
    expect(survey).toMatchObject({
      tracks: 12,
      positions: 3000,
      dimensions: 1,
      missingFrames: 0,
      recommendedOrder: 'second',
    });
    expect(survey.interval).toBeCloseTo(0.2, 9);
    expect(survey.localizationError).toHaveLength(1);
    expect(survey.relaxationTime).toBeGreaterThan(0);
    for (const warning of survey.warnings as unknown[]) {
      expect(warning).toMatchObject({ code: expect.any(String), message: expect.any(String) });
    }
  });

  it('tells people the same, without colors where nobody looks', async () => {
    const { status, stdout } = await type('survey tracks.csv');
    expect(status).toBe(0);
    expect(stdout).toContain('second');
    expect(stdout).not.toContain('\u001b');
  });

  it('writes JSON where the output file is named so, and text elsewhere', async () => {
    await type('survey tracks.csv --quiet -o survey.json');
    expect(readJson('survey.json')).toMatchObject({ tracks: 12 });
    const { stdout } = await type('survey tracks.csv --quiet -o survey.txt');
    expect(stdout).toBe('');
    expect(readFileSync(join(place.path, 'survey.txt'), 'utf8')).toContain('tracks');
  });

  it('writes momenta with their errors', async () => {
    const { status } = await type('survey tracks.csv --momenta momenta.csv --mass 2 --quiet');
    expect(status).toBe(0);
    const [header, first] = readFileSync(join(place.path, 'momenta.csv'), 'utf8').split('\n');
    const columns = header.split(',');
    for (const name of ['track', 'time', 'x', 'momentum_x', 'momentum_x_error', 'kinetic_energy']) {
      expect(columns).toContain(name);
    }
    expect(first.split(',')).toHaveLength(columns.length);
  });
});

describe('fit', () => {
  it('writes format, version, study, sources with their hashes, and the model', () => {
    const fit = readJson('fit.json');
    expect(fit).toMatchObject({
      format: 'wanderlaw-fit',
      version: 1,
      program: 'wanderlaw 0.1.0',
      study: { order: 'second', friction: 'constant', replicates: 60, units: { length: 'um', time: 's' } },
      sources: [{ path: 'tracks.csv', sha256: expect.stringMatching(/^[0-9a-f]{64}$/) as string }],
    });
    expect(Date.parse(fit.created as string)).toBeGreaterThan(Date.parse('2020-01-01'));
  });

  it('depends on tracks, study and seed alone, apart from the clock', async () => {
    await type(`${FIT} --quiet -o again.json --workers 2`);
    expect(readWithoutClock('again.json')).toBe(readWithoutClock('fit.json'));
    await type(`${FIT} --quiet -o other.json --seed 2`);
    expect(readWithoutClock('other.json')).not.toBe(readWithoutClock('fit.json'));
  });

  it('prints the fit as JSON, the same as it writes', async () => {
    const { stdout, stderr } = await type(`${FIT} --json --quiet`);
    expect(stderr).toBe('');
    expect(withoutClock(stdout)).toBe(readWithoutClock('fit.json'));
  });

  it('takes a study from a file, and the line wins', async () => {
    place.write(
      'study.json',
      JSON.stringify({
        $schema: 'x',
        force: 'linear',
        friction: 'linear',
        noise: 'constant',
        replicates: 60,
      }),
    );
    await type(
      'fit tracks.csv --quiet --study study.json --friction constant --units um,s -o study-fit.json',
    );
    expect(readWithoutClock('study-fit.json')).toBe(readWithoutClock('fit.json'));
    place.write('study.json', JSON.stringify({ frictoin: 'linear' }));
    const { status, stderr } = await type('fit tracks.csv --study study.json');
    expect([status, stderr]).toEqual([
      2,
      'wanderlaw: study.json: "frictoin" is not a key of a study; did you mean friction?\n',
    ]);
  });

  it('reads standard input under the name -', async () => {
    const stdin = readFileSync(join(place.path, 'tracks.csv'), 'utf8');
    const { status, stdout } = await place.run(
      [...FIT.replace('tracks.csv', '-').split(' '), '--json', '--quiet'],
      {
        stdin,
      },
    );
    expect(status).toBe(0);
    expect(JSON.parse(stdout)).toMatchObject({
      sources: [{ path: '-', sha256: (readJson('fit.json').sources as { sha256: string }[])[0].sha256 }],
    });
  });

  it('says that nothing was written without -o, and prints a summary', async () => {
    const { status, stdout, stderr } = await type(FIT);
    expect(status).toBe(0);
    expect(stdout).toContain('friction');
    expect(stderr).toContain('-o fit.json');
  });
});

describe('color', () => {
  it('appears on a terminal only, and not under NO_COLOR', async () => {
    const line = ['survey', 'tracks.csv'];
    expect((await place.run(line, { isTTY: true })).stdout).toContain('\u001b[');
    expect((await place.run(line, { isTTY: true, env: { NO_COLOR: '1' } })).stdout).not.toContain('\u001b[');
    expect((await place.run(line, { env: { CI: '1', FORCE_COLOR: '1' } })).stdout).not.toContain('\u001b[');
  });
});

describe('scenario and simulate', () => {
  it('write a scenario, and tracks that survey reads', async () => {
    const scenario = await type('scenario fit.json -o scenario.json --title A-bowl --quiet');
    expect([scenario.status, scenario.stdout, scenario.stderr]).toEqual([0, '', '']);
    expect(readJson('scenario.json')).toMatchObject({
      format: 'wanderlaw-scenario',
      title: 'A-bowl',
      order: 'second',
    });
    const { status, stderr } = await type(
      'simulate scenario.json -o simulated.csv --tracks 6 --frames 40 --interval 0.1 --seed 3',
    );
    expect([status, stderr]).toEqual([0, 'wanderlaw: wrote simulated.csv: 6 tracks, 240 positions\n']);
    const survey = await type('survey simulated.csv --json --quiet');
    expect(JSON.parse(survey.stdout)).toMatchObject({ tracks: 6, positions: 240, dimensions: 1 });
  });

  it('give the same table on standard output, whatever the number of workers', async () => {
    const table = readFileSync(join(place.path, 'simulated.csv'), 'utf8');
    const line = 'simulate scenario.json --tracks 6 --frames 40 --interval 0.1 --seed 3';
    for (const workers of ['1', '2']) {
      expect((await type(line, ['--workers', workers])).stdout).toBe(table);
    }
    expect((await type(line.replace('--seed 3', '--seed 4'))).stdout).not.toBe(table);
    expect((await type(line, ['--ensemble'])).stdout).not.toBe(table);
  });

  it('tell what was simulated as JSON', async () => {
    const { stdout } = await type('simulate scenario.json -o s.csv --tracks 2 --frames 5 --json --quiet');
    expect(JSON.parse(stdout)).toMatchObject({ output: 's.csv', tracks: 2, positions: 10, seed: 1 });
  });
});

describe('resimulate', () => {
  const LINE = 'resimulate fit.json --replicates 19 --json --quiet --workers 1';
  let first: Outcome;

  it('prints the promised keys, the same for any number of workers', async () => {
    first = await type(LINE);
    expect([first.status, first.stderr]).toEqual([0, '']);
    const result = JSON.parse(first.stdout) as {
      statistics: unknown[];
      refit: unknown[];
      consistent: unknown;
    };
    expect(typeof result.consistent).toBe('boolean');
    expect(result.statistics.length).toBeGreaterThan(0);
    for (const statistic of result.statistics) {
      for (const key of ['name', 'recorded', 'low', 'high', 'p']) expect(statistic).toHaveProperty(key);
    }
    for (const coefficient of result.refit) {
      for (const key of ['name', 'putIn', 'refitted']) expect(coefficient).toHaveProperty(key);
    }
    expect((await type(LINE.replace('--workers 1', '--workers 2'))).stdout).toBe(first.stdout);
  });

  it('leaves out the refit where asked to', async () => {
    const { stdout } = await type(LINE, ['--no-refit']);
    expect(JSON.parse(stdout)).toMatchObject({ refit: [] });
  });

  it('finds tracks that moved by --tracks, and refuses others', async () => {
    renameSync(join(place.path, 'tracks.csv'), join(place.path, 'moved.csv'));
    const lost = await type(LINE, ['--no-refit']);
    expect(lost.status).toBe(3);
    expect(lost.stderr).toMatch(/^wanderlaw: tracks\.csv[^\n]*--tracks[^\n]*\n$/);
    const found = await type(LINE, ['--no-refit', '--tracks', 'moved.csv']);
    expect(found.status).toBe(0);
    expect(found.stdout).toBe((await type(LINE, ['--no-refit', '--tracks', 'moved.csv'])).stdout);
    const wrong = await type(LINE, ['--tracks', 'simulated.csv']);
    expect(wrong.status).toBe(3);
    expect(wrong.stderr).toMatch(/simulated\.csv is not the file the fit was made from/);
    place.write('tracks.csv', 'track,time,x\n1,0,0\n');
    const changed = await type(LINE);
    expect(changed.status).toBe(3);
    expect(changed.stderr).toContain('tracks.csv is not the file');
    renameSync(join(place.path, 'moved.csv'), join(place.path, 'tracks.csv'));
  });
});

describe('report', () => {
  it('writes one page with the comparison and the scenario in it', async () => {
    await type('resimulate fit.json --replicates 19 --json --quiet --workers 1 -o resimulation.json');
    const { status, stdout, stderr } = await type(
      'report fit.json --resimulation resimulation.json --scenario scenario.json -o report.html',
    );
    expect([status, stdout, stderr]).toEqual([0, '', 'wanderlaw: wrote report.html\n']);
    const page = readFileSync(join(place.path, 'report.html'), 'utf8');
    expect(page).toMatch(/^<!doctype html>/i);
    expect(page).toContain('<svg');
    expect(page).toContain('tracks.csv');
  });

  it('refuses a resimulation file that is none', async () => {
    const { status, stderr } = await type('report fit.json --resimulation fit.json -o r.html');
    expect(status).toBe(2);
    expect(stderr).toMatch(/^wanderlaw: fit\.json is not a resimulation file[^\n]*\n$/);
  });
});

it('the journey leaves nothing behind but what was asked for', () => {
  expect(place.list().filter((name) => name.startsWith('.') || name.endsWith('.part'))).toEqual([]);
});
