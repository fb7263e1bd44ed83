/** Scenario, simulate and resimulate at the command line: what they say, and how they refuse. */

import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, describe, expect, it } from 'vitest';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import { exampleFit } from '../support/fitFixtures.js';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

place.write('fit.json', JSON.stringify(exampleFit({ dimensions: 1, friction: 10, noise: 20 })));
place.write('first.json', JSON.stringify(exampleFit({ dimensions: 1, order: 'first' })));
const readJson = (name: string) =>
  JSON.parse(readFileSync(join(place.path, name), 'utf8')) as Record<string, unknown>;

const SCENARIO = {
  format: 'wanderlaw-scenario',
  version: 1,
  dimensions: 1,
  order: 'second',
  axes: [{ kind: 'open' }],
  coefficients: {
    force: { form: 'vector', formulas: ['-x'] },
    friction: { form: 'scalar', values: [1] },
    noise: { form: 'scalar', values: [2] },
  },
  start: { kind: 'normal', mean: [0], spread: [1] },
  observation: { tracks: 3, frames: 20, interval: 0.5, localizationError: [0] },
};

describe('scenario', () => {
  it('tells the standing conditions one by one on standard error, and keeps them', async () => {
    const { status, stderr } = await place.run(['scenario', 'fit.json', '-o', 'scenario.json']);
    expect(status).toBe(0);
    const lines = stderr.split('\n');
    expect(lines.filter((line) => line.startsWith('wanderlaw: holds: '))).toHaveLength(7);
    expect(stderr).toMatch(
      /relaxation of the whole process: [\d.]+ \([\d.]+ to [\d.]+\); a recording of this size is worth [\d.]+ independent samples/,
    );
    const { standing } = readJson('scenario.json') as {
      standing: { conditions: unknown[]; relaxation: { time: number } };
    };
    expect(standing.conditions).toHaveLength(7);
    // overdamped oscillator, k = 1, Γ = 10: 1/(5 − √24) = 9.9
    expect(Math.abs(standing.relaxation.time / 9.9 - 1)).toBeLessThan(0.25);
  });

  it('writes the first-order limit and says what it leaves out', async () => {
    const { status, stderr } = await place.run(['scenario', 'fit.json', '--first-order', '-o', 'slow.json']);
    expect(status).toBe(0);
    expect(stderr).toMatch(/neglected terms are 1 % of what is kept in the median/); // k/Γ² = 0.01
    expect(readJson('slow.json')).toMatchObject({ order: 'first', reading: 'ito' });
    const run = await place.run(['simulate', 'slow.json', '--tracks', '2', '--frames', '3', '--quiet']);
    expect([run.status, run.stdout.split('\n').length]).toEqual([0, 8]);
    const refused = await place.run(['scenario', 'first.json', '--first-order']);
    expect([refused.status, refused.stdout]).toEqual([2, '']);
    expect(refused.stderr).toMatch(
      /^wanderlaw: the fit is of first order already; leave out --first-order\n$/,
    );
  });
});

describe('simulate', () => {
  it('with a tolerance tells step, error and observed order, on standard error and in JSON', async () => {
    place.write('coarse.json', JSON.stringify({ ...SCENARIO, integration: { step: 0.5 } }));
    const { status, stderr, stdout } = await place.run([
      'simulate',
      'coarse.json',
      '-o',
      'fine.csv',
      '--json',
      '--tolerance',
      '0.02',
      '--workers',
      '1',
    ]);
    expect(status).toBe(0);
    expect(stderr).toMatch(
      /time step 0\.\d+ after \d halvings: .* observed order of convergence [12]\.\d\d ± 0\.\d\d/,
    );
    const result = JSON.parse(stdout) as { step: number; stepControl: { halvings: number; order: number } };
    expect(result.step).toBeLessThan(0.5);
    expect(result.stepControl.halvings).toBeGreaterThan(0);
  });

  it.each<[string, Record<string, unknown>, string]>([
    ['no observation', { observation: undefined }, 'bad.json: observation: '],
    [
      'a formula that cannot be read',
      { coefficients: { ...SCENARIO.coefficients, force: { form: 'vector', formulas: ['-x*('] } } },
      'coefficients.force.formulas[0]: the formula "-x*(" cannot be read',
    ],
    [
      'a formula that calls the machine',
      { coefficients: { ...SCENARIO.coefficients, force: { form: 'vector', formulas: ['import(x)'] } } },
      'coefficients.force.formulas[0]: ',
    ],
    [
      'negative noise',
      { coefficients: { ...SCENARIO.coefficients, noise: { form: 'scalar', values: [-2] } } },
      'coefficients.noise.values[0]: noise must not be negative, got -2',
    ],
    [
      'a step beyond stability',
      { integration: { step: 5 }, observation: { ...SCENARIO.observation, interval: 9 } },
      'integration.step: 5 is unstable',
    ],
    [
      'the integrator of the other order',
      { integration: { integrator: 'platen' } },
      'integration.integrator: "platen" does not solve order "second"',
    ],
    [
      'constants to fade to that have no friction’s form',
      {
        visited: { low: [-1], high: [1] },
        continuation: { kind: 'fade', width: 1, towards: { friction: [1, 2] } },
      },
      'continuation.towards.friction: has 2 components',
    ],
    [
      'constants for a continuation that holds',
      { visited: { low: [-1], high: [1] }, continuation: { kind: 'hold', towards: { friction: [1] } } },
      'continuation.towards.friction: has no meaning with kind "hold"',
    ],
    [
      'a start outside the walls',
      { axes: [{ kind: 'walls', low: 0, high: 1 }], start: { kind: 'points', points: [[2]] } },
      'start.points[0][0]: 2 lies outside the walls',
    ],
    ['a negative warm-up', { start: { ...SCENARIO.start, warmUp: -1 } }, 'bad.json: start.warmUp: '],
    ['another version', { version: 2 }, 'bad.json: version: '],
  ])('refuses %s with status 2, naming the field', async (_title, change, sentence) => {
    place.write('bad.json', JSON.stringify({ ...SCENARIO, ...change }));
    const { status, stdout, stderr } = await place.run(['simulate', 'bad.json', '-o', 'bad.csv']);
    expect([status, stdout]).toEqual([2, '']);
    expect(stderr).toMatch(/^wanderlaw: [^\n]+\n$/);
    expect(stderr).toContain(sentence);
    expect(place.list()).not.toContain('bad.csv');
  });

  it('warns, with the place, of a continuation that leaves friction at zero', async () => {
    place.write(
      'leaky.json',
      JSON.stringify({
        ...SCENARIO,
        visited: { low: [-2], high: [2] },
        continuation: { kind: 'fade', width: 1, towards: { friction: [0] }, stiffness: 1 },
      }),
    );
    const { status, stderr } = await place.run(['simulate', 'leaky.json', '-o', 'leaky.csv']);
    expect(status).toBe(0);
    expect(stderr).toMatch(
      /warning: no stationary law is assured: coefficients\.friction: .* 0 at x = 4 \(in the continuation\)/,
    );
  });

  it('stopped half-way leaves neither table nor threads behind', async () => {
    const scenario = buildScenario(exampleFit({ dimensions: 2 }));
    place.write(
      'long.json',
      JSON.stringify({ ...scenario, observation: { ...scenario.observation, tracks: 5000, frames: 20_000 } }),
    );
    const before = place.list();
    const child = spawn(
      process.execPath,
      [
        '--import',
        import.meta.resolve('tsx'),
        fileURLToPath(new URL('../../bin/wanderlaw.ts', import.meta.url)),
        ...['simulate', 'long.json', '-o', 'long.csv', '--workers', '2'],
      ],
      { cwd: place.path },
    );
    const exit = once(child, 'exit') as Promise<[number | null, string | null]>;
    await new Promise((done) => setTimeout(done, 2500)); // long enough to be simulating
    child.kill('SIGINT');
    expect(await exit).toEqual([null, 'SIGINT']);
    expect(place.list()).toEqual(before);
  });
});

describe('--region', () => {
  it.each([
    ['left', 'has no ='],
    ['=0:1', 'needs a name'],
    ['left=0', 'LOW:HIGH'],
    ['left=1:0', 'low end is not below'],
    ['left=a:1', 'a number'],
    ['left=0:1,0:1', '2 axes but the tracks have 1'],
  ])('%s is refused', async (text, words) => {
    const { status, stderr } = await place.run(['resimulate', 'fit.json', '--region', text]);
    expect(status).toBe(2);
    expect(stderr).toContain(words);
    expect(stderr).toContain('--region');
  });
});
