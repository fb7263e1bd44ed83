/** The commands `test` and `challenge` on the line. */

import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

beforeAll(async () => {
  const tracks = simulateSecondOrder({
    tracks: 10,
    frames: 500,
    interval: 0.2,
    friction: 1,
    stiffness: 1,
    localizationError: 0.02,
    seed: 3,
  });
  place.write('tracks.csv', [...formatTrackTable(tracks)].join(''));
  place.write('study.json', JSON.stringify({ laws: { ramp: { formula: 'g0+g1*x', about: 'a ramp' } } }));
  const shapes = ['--force', 'linear', '--friction', 'constant', '--noise', 'constant'];
  const line = ['fit', 'tracks.csv', '--order', 'second', ...shapes, '--replicates', '20'];
  const { status, stderr } = await place.run([...line, '--study', 'study.json', '-o', 'fit.json', '--quiet']);
  if (status !== 0) throw new Error(stderr);
});

describe('test', () => {
  it('prints the keys that are promised', async () => {
    const { status, stdout } = await place.run([
      'test',
      'fit.json',
      '--hypothesis',
      'uniform-friction',
      '--json',
    ]);
    expect(status).toBe(0);
    const result = JSON.parse(stdout) as Record<string, unknown>;
    for (const key of ['hypothesis', 'statistic', 'p', 'rejected', 'parameters', 'note', 'places'])
      expect(result).toHaveProperty(key);
    expect(result.hypothesis).toBe('uniform-friction');
    const { friction_xx: friction } = result.parameters as Record<string, Record<string, number>>;
    expect(friction.low).toBeLessThan(friction.value);
    expect(friction.high).toBeGreaterThan(friction.value);
    expect(result.rejected).toBe((result.p as number) < 0.05);
  });

  it('compares laws, by formula and by name, best first', async () => {
    const laws = ['--law', 'constant', '--law', 'g0*(1+a*tanh(x))', '--law', 'ramp', '--start', 'a=0.1'];
    const line = ['test', 'fit.json', '--hypothesis', 'law', '--field', 'friction', ...laws];
    const { status, stdout } = await place.run([...line, '--json']);
    expect(status).toBe(0);
    const { comparison, law } = JSON.parse(stdout) as {
      comparison: { law: string; score: number }[];
      law: string;
    };
    expect(comparison.map((entry) => entry.law).sort()).toEqual(['constant', 'g0*(1+a*tanh(x))', 'ramp']);
    expect(comparison[0].law).toBe(law);
    const scores = comparison.map(({ score }) => score);
    expect(scores).toEqual([...scores].sort((a, b) => b - a));
    const people = await place.run(line);
    expect(people.stdout).toContain('Laws compared');
    expect(people.stdout).toContain('ramp');
  });

  it('lists the laws known by name, those of the study among them', async () => {
    const bare = await place.run(['test', '--laws', '--json']);
    expect(bare.status).toBe(0);
    const names = (text: string): string[] =>
      (JSON.parse(text) as { laws: { name: string }[] }).laws.map(({ name }) => name);
    expect(names(bare.stdout)).toEqual(expect.arrayContaining(['constant', 'tanh-step', 'faxen-parallel']));
    expect(names((await place.run(['test', 'fit.json', '--laws', '--json'])).stdout)).toContain('ramp');
    expect(names((await place.run(['test', '--laws', '--study', 'study.json', '--json'])).stdout)).toContain(
      'ramp',
    );
    const people = await place.run(['test', '--laws']);
    expect(people.stdout).toMatch(/faxen-parallel: .*\n.*friction/);
    expect(people.stdout).toContain('Happel');
  });

  it.each([
    [['test'], /needs a fit file/],
    [['test', 'fit.json'], /--hypothesis is needed/],
    [['test', 'fit.json', '--hypothesis', 'uniform-fricton'], /did you mean uniform-friction/],
    [['test', 'fit.json', '--hypothesis', 'law', '--field', 'friction'], /--law/],
    [['test', 'fit.json', '--law', 'g0'], /--field/],
    [['test', 'fit.json', '--hypothesis', 'zero-force', '--law', 'g0'], /--law belongs to --hypothesis law/],
    [['test', 'fit.json', '--field', 'diffusion', '--law', 'g0'], /use force, friction, noise, temperature/],
    [['test', 'fit.json', '--field', 'friction', '--law', 'g0*('], /cannot be read/],
    [['test', 'fit.json', '--field', 'friction', '--law', 'g0', '--start', 'g1=2'], /g1.*g0/],
    [['test', 'fit.json', '--field', 'friction', '--law', 'g0', '--fix', 'g0'], /--fix is NAME=NUMBER/],
    [['test', 'fit.json', '--hypothesis', 'isotropic-friction'], /two dimensions/],
    [['challenge'], /needs fit file/],
    [['challenge', 'tracks.csv'], /not a fit file/],
  ])('refuses %j with a sentence and status 2', async (line, words) => {
    const { status, stdout, stderr } = await place.run(line);
    expect(status).toBe(2);
    expect(stdout).toBe('');
    expect(stderr).toMatch(words);
    expect(stderr.trim().split('\n')).toHaveLength(1);
  });

  it('refuses tracks that are not those of the fit with status 3', async () => {
    place.write('other.csv', 'track,frame,x\n1,0,0\n1,1,1\n1,2,0\n1,3,1\n');
    const line = ['test', 'fit.json', '--hypothesis', 'zero-force', '--tracks', 'other.csv'];
    const { status, stderr } = await place.run(line);
    expect(status).toBe(3);
    expect(stderr).toContain('not the file the fit was made from');
  });
});

describe('challenge', () => {
  it('prints the keys that are promised, and the same to a file that report reads', async () => {
    const { status, stdout } = await place.run(['challenge', 'fit.json', '--json']);
    expect(status).toBe(0);
    const { checks } = JSON.parse(stdout) as { checks: Record<string, unknown>[] };
    expect(checks.map(({ name }) => name)).toEqual(
      expect.arrayContaining(['memory', 'speed-dependent-friction', 'gaussian-noise', 'stationarity']),
    );
    for (const check of checks) {
      expect(typeof check.p).toBe('number');
      expect(typeof check.holds).toBe('boolean');
      expect(typeof check.note).toBe('string');
    }
  });

  it('tells people what holds', async () => {
    const { stdout } = await place.run(['challenge', 'fit.json', '--confidence', '0.99']);
    expect(stdout).toContain('Assumptions of the model');
    expect(stdout).toContain('Tracks move independently of one another');
  });
});
