/** Completion scripts: they know what the program knows, and the shells that are here run them. */

import { execFileSync } from 'node:child_process';
import { existsSync, mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it, test } from 'vitest';
import { DATA_SET_NAMES } from '../../datasets/truth.js';
import { COMMANDS, DATA_SETS, SHELLS } from '../../src/cli/commandTable.js';
import { OPTIONS, type OptionSpec } from '../../src/cli/options.js';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

const scripts = new Map<string, string>();
beforeAll(async () => {
  for (const shell of SHELLS) {
    const { status, stdout, stderr } = await place.run(['completion', shell]);
    expect([status, stderr]).toEqual([0, '']);
    scripts.set(shell, stdout);
    place.write(`wanderlaw.${shell}`, stdout);
  }
  place.write('tracks.csv', '');
  place.write('two words.csv', '');
  mkdirSync(join(place.path, 'truck'));
});

const findShell = (name: string): string | undefined =>
  [`/bin/${name}`, `/usr/bin/${name}`, `/usr/local/bin/${name}`].find((path) => existsSync(path));

/** What bash offers for the last word of a line. */
function completeInBash(line: string): string[] {
  const words = line.split(' ');
  const script = `source ./wanderlaw.bash
COMP_WORDS=(${words.map((word) => `'${word}'`).join(' ')})
COMP_CWORD=${words.length - 1}
_wanderlaw
printf '%s\\n' "\${COMPREPLY[@]}"`;
  const printed = execFileSync('bash', ['--norc', '-c', script], { cwd: place.path, encoding: 'utf8' });
  return printed.split('\n').filter((word) => word !== '');
}

describe.each(SHELLS)('the script for %s', (shell) => {
  it('knows every command, option and choice', () => {
    const script = scripts.get(shell) ?? '';
    for (const { name, options } of COMMANDS) {
      expect(script).toContain(name);
      for (const option of options) {
        const flag = /--([\w-]+)/.exec(OPTIONS[option].flags)?.[1] ?? '';
        expect(script).toMatch(new RegExp(`(--|-l )${flag}\\b`));
        const { choices = [] }: OptionSpec = OPTIONS[option];
        for (const choice of choices) expect(script.replaceAll('\\:', ':')).toContain(choice);
      }
    }
  });

  it.skipIf(findShell(shell) === undefined)('is one that the shell can read', () => {
    const check = () => execFileSync(shell, ['-n', `wanderlaw.${shell}`], { cwd: place.path, stdio: 'pipe' });
    expect(check().toString()).toBe('');
  });
});

describe.skipIf(findShell('bash') === undefined)('bash', () => {
  it.each([
    ['wanderlaw su', ['survey']],
    ['wanderlaw ', [...COMMANDS.map(({ name }) => name), 'help']],
    ['wanderlaw help eval', ['evaluate']],
    ['wanderlaw fit --fr', ['--friction', '--friction-form']],
    ['wanderlaw fit tracks.csv --estimator d', ['differences']],
    ['wanderlaw fit tracks.csv --order = f', ['first']],
    ['wanderlaw fit --force spl', ['spline', 'spline:']],
    ['wanderlaw test fit.json --hypothesis uniform-n', ['uniform-noise']],
    ['wanderlaw evaluate --fr', []],
    ['wanderlaw demo s', ['settling-beads', 'stripe-cells']],
    ['wanderlaw completion z', ['zsh']],
    ['wanderlaw survey tr', ['tracks.csv', 'truck']],
    ['wanderlaw survey tw', ['two words.csv']],
    ['wanderlaw fit --study tr', ['tracks.csv', 'truck']],
    ['wanderlaw report fit.json --figures tr', ['truck']],
    ['wanderlaw fit --seed ', []],
  ])('offers for "%s" %j', (line, offered) => {
    expect(completeInBash(line).sort()).toEqual([...offered].sort());
  });
});

describe.skipIf(findShell('fish') === undefined)('fish', () => {
  it.each([
    ['wanderlaw su', ['survey']],
    ['wanderlaw fit --fr', ['--friction', '--friction-form']],
    ['wanderlaw fit --estimator d', ['differences']],
    ['wanderlaw survey tr', ['tracks.csv', 'truck/']],
  ])('offers for "%s" %j', (line, offered) => {
    const printed = execFileSync('fish', ['-c', `source wanderlaw.fish; complete -C '${line}'`], {
      cwd: place.path,
      encoding: 'utf8',
      env: { ...process.env, HOME: place.path },
    });
    const words = printed.split('\n').flatMap((text) => (text === '' ? [] : [text.split('\t')[0]]));
    expect(words.sort()).toEqual([...offered].sort());
  });
});

test('the data sets that are offered are those that are shipped', () => {
  expect([...DATA_SETS].sort()).toEqual([...DATA_SET_NAMES].sort());
});

test('a shell that is not known is answered with those that are', async () => {
  const { status, stderr } = await place.run(['completion', 'fihs']);
  expect([status, stderr]).toEqual([
    2,
    'wanderlaw: shell "fihs" is not known; did you mean fish? (bash, zsh, fish)\n',
  ]);
});
