import { afterAll, describe, expect, it } from 'vitest';
import { exampleFit } from '../support/fitFixtures.js';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

const fit = exampleFit();
const { coordinates } = fit.data;
place.write('fit.json', JSON.stringify(fit));
const header = coordinates.join(',');
const cells = coordinates.map(() => '0').join(',');

describe('evaluate', () => {
  it('prints the columns in the order that is promised', async () => {
    place.write('points.csv', `${header}\n${cells}\n`);
    const { status, stdout } = await place.run(['evaluate', 'fit.json', '--at', 'points.csv', '--quiet']);
    expect(status).toBe(0);
    const [names, row, end] = stdout.split('\n');
    expect(end).toBe('');
    const columns = names.split(',');
    expect(columns.slice(0, coordinates.length)).toEqual(coordinates);
    expect(columns.at(-1)).toBe('visited');
    const quantities = columns.slice(coordinates.length, -1);
    for (let i = 0; i < quantities.length; i += 3) {
      expect(quantities.slice(i, i + 3)).toEqual(['', '_low', '_high'].map((end) => quantities[i] + end));
    }
    expect(quantities).toContain('force_x');
    expect(quantities).toContain('friction_xx');
    expect(quantities).toContain('noise_xx');
    expect(quantities).toContain('temperature_xx');
    const values = row.split(',').map(Number);
    expect(values).toHaveLength(columns.length);
    for (let i = coordinates.length; i < values.length - 1; i += 3) {
      expect(values[i + 1]).toBeLessThanOrEqual(values[i]);
      expect(values[i + 2]).toBeGreaterThanOrEqual(values[i]);
    }
  });

  it('reads the same places from any order of columns, with others between, and from standard input', async () => {
    place.write('points.csv', `${header}\n${cells}\n`);
    const plain = await place.run(['evaluate', 'fit.json', '--at', 'points.csv']);
    const table = `label\t${[...coordinates].reverse().join('\t')}\nhere\t${coordinates.map(() => '0').join('\t')}\n`;
    const other = await place.run(['evaluate', 'fit.json', '--at', '-'], { stdin: table });
    expect(other.stdout).toBe(plain.stdout);
  });

  it('gives the same values as JSON', async () => {
    const csv = await place.run(['evaluate', 'fit.json', '--at', 'points.csv']);
    const json = await place.run(['evaluate', 'fit.json', '--at', 'points.csv', '--json']);
    const { points } = JSON.parse(json.stdout) as { points: Record<string, number>[] };
    expect(Object.keys(points[0]).join(',')).toBe(csv.stdout.split('\n')[0]);
    expect(Object.values(points[0]).join(',')).toBe(csv.stdout.split('\n')[1]);
  });

  it('gives wider bands that hold everywhere at once', async () => {
    const width = async (...more: string[]): Promise<number> => {
      const { stdout } = await place.run(['evaluate', 'fit.json', '--at', 'points.csv', '--json', ...more]);
      const { points } = JSON.parse(stdout) as { points: Record<string, number>[] };
      return points[0].friction_xx_high - points[0].friction_xx_low;
    };
    expect(await width('--simultaneous')).toBeGreaterThanOrEqual(await width());
  });

  it('warns of places outside the visited region and marks them', async () => {
    place.write('far.csv', `${header}\n${coordinates.map(() => '1e6').join(',')}\n`);
    const { status, stdout, stderr } = await place.run(['evaluate', 'fit.json', '--at', 'far.csv']);
    expect([status, stdout.trim().split(',').at(-1)]).toEqual([0, '0']);
    expect(stderr).toContain('1 of 1 places');
  });

  const mistakes: readonly [title: string, points: string, ...words: string[]][] = [
    ['a missing column', 'a,b\n1,2\n', 'points.csv line 1', 'no column x'],
    ['text in a cell', `${header}\n${cells}\nabc${cells.slice(1)}\n`, 'points.csv line 3, column x', '"abc"'],
    ['an empty cell', `${header},label\n${cells.slice(1)},here\n`, 'points.csv line 2, column x'],
    ['no rows', `${header}\n`, 'points.csv', 'no places'],
    ['an empty file', '', 'points.csv'],
  ];
  for (const [title, points, ...words] of mistakes) {
    it(`ends with 3 and names the place for ${title}`, async () => {
      place.write('points.csv', points);
      const { status, stdout, stderr } = await place.run(['evaluate', 'fit.json', '--at', 'points.csv']);
      expect(stderr).toMatch(/^wanderlaw: [^\n]+\n$/);
      for (const word of words) expect(stderr).toContain(word);
      expect([status, stdout]).toEqual([3, '']);
    });
  }
});
