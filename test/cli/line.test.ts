import { afterAll, describe, expect, it } from 'vitest';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

/** The line, and words of the sentence it is answered with. */
const MISTAKES: readonly [line: string, ...words: string[]][] = [
  ['fot', '"fot"', 'did you mean fit?'],
  ['help fot', '"fot"', 'did you mean fit?'],
  ['fit', 'track tables', 'wanderlaw fit --help'],
  ['fit a.csv --ordr first', '--ordr', 'did you mean --order?'],
  ['fit a.csv --order frist', '--order "frist"', 'did you mean first?', 'auto, first, second'],
  ['fit a.csv --estimator diferences', 'did you mean differences?'],
  ['fit a.csv --force splin', '--force "splin"', 'did you mean spline?'],
  ['fit a.csv --force blob', '--force "blob"', 'polynomial:N'],
  ['fit a.csv --force spline:one', '--force "spline:one"'],
  ['fit a.csv --friction-form vector', '--friction-form "vector"', 'scalar, axes, matrix'],
  ['fit a.csv --order', '--order needs a value'],
  ['fit a.csv --replicates 3', '--replicates', 'from 20 to 100000', '"3"'],
  ['fit a.csv --replicates 40.5', '--replicates', 'whole number', '"40.5"'],
  ['fit a.csv --confidence 1', '--confidence', 'below 1', '"1"'],
  ['fit a.csv --exposure -0.1', '--exposure', 'from 0 to 1'],
  ['fit a.csv --seed -1', '--seed', '"-1"'],
  ['fit a.csv --seed Infinity', '--seed', '"Infinity"'],
  ['fit a.csv --workers 0', '--workers', '"0"'],
  ['fit a.csv --interval 0', '--interval', 'above 0'],
  ['fit a.csv --length-scale nought', '--length-scale', '"nought"'],
  ['fit a.csv --localization-error -1', '--localization-error', 'auto', '"-1"'],
  ['fit a.csv --units m', '--units', 'LENGTH,TIME', '"m"'],
  ['fit a.csv --period 4,x', '--period', '"4,x"'],
  ['fit a.csv --columns trak=ID', 'did you mean track?'],
  ['fit a.csv --columns x=a,x=b', 'x twice'],
  ['fit a.csv --columns nonsense', 'ROLE=NAME', '"nonsense"'],
  ['fit a.csv --order first --friction constant', '--friction has no meaning', '--drift'],
  ['fit a.csv --order second --drift constant', '--drift has no meaning', '--force'],
  ['evaluate fit.json', '--at is needed'],
  ['scenario a b', 'fewer words'],
  ['simulate s.json --json', '-o FILE'],
  ['demo felt-tabel', 'did you mean felt-table?'],
  ['--trce', '--trce'],
];

describe('a mistake on the line', () => {
  for (const [line, ...words] of MISTAKES) {
    it(`is told in one sentence: ${line}`, async () => {
      const { status, stdout, stderr } = await place.run(line.split(' '));
      expect(stderr).toMatch(/^wanderlaw: [^\n]+\n$/);
      for (const word of words) expect(stderr).toContain(word);
      expect([status, stdout]).toEqual([2, '']);
      expect(stderr).not.toContain('wanderlaw: something went wrong');
      expect(place.list()).toEqual([]);
    });
  }

  it('shows where it arose with --trace', async () => {
    const { status, stderr } = await place.run(['fit', 'a.csv', '--order', 'frist', '--trace']);
    expect(status).toBe(2);
    expect(stderr).toMatch(/\n\s+at /);
  });

  it('of giving no command at all is answered with the commands', async () => {
    const { status, stdout, stderr } = await place.run([]);
    expect([status, stdout]).toEqual([2, '']);
    expect(stderr).toContain('Commands:');
  });
});

describe('the version', () => {
  it('is that of the package', async () => {
    const { status, stdout } = await place.run(['--version']);
    expect([status, stdout]).toEqual([0, '0.1.0\n']);
  });
});
