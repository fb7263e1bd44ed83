/** The report command: the page, the figures, and what it says where something is wrong. */

import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { beadFit } from '../pages/pageFits.js';
import {
  exampleChallenges,
  exampleResimulation,
  exampleScenario,
  exampleTests,
} from '../pages/pageResults.js';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

const type = (line: string) => place.run(line.split(' '));
const read = (name: string) => readFileSync(join(place.path, name), 'utf8');
const write = (name: string, value: unknown) => place.write(name, JSON.stringify(value));

write('fit.json', beadFit());
write('resimulation.json', {
  format: 'wanderlaw-resimulation',
  version: 1,
  program: 'wanderlaw 0.1.0',
  ...exampleResimulation(),
});
write('test-1.json', exampleTests()[0]);
write('test-2.json', exampleTests().slice(1));
write('challenge.json', { checks: exampleChallenges() });
write('scenario.json', exampleScenario());

describe('report', () => {
  it('tells every result it is given', async () => {
    const { status, stdout, stderr } = await type(
      'report fit.json --resimulation resimulation.json --tests test-1.json --tests test-2.json --challenges challenge.json --scenario scenario.json -o report.html',
    );
    expect([status, stdout, stderr]).toEqual([0, '', 'wanderlaw: wrote report.html\n']);
    const page = read('report.html');
    for (const id of ['tests', 'resimulation', 'scenario'])
      expect(page.includes(`id="${id}"`), id).toBe(true);
    for (const words of [
      'Friction is the same everywhere',
      'The force has a potential',
      'The noise is Gaussian',
    ])
      expect(page.includes(words), words).toBe(true);
  });

  it('writes each picture as SVG and PNG with its data beside it, and no page unless asked', async () => {
    const { status, stdout, stderr } = await type('report fit.json --figures figures');
    expect([status, stdout]).toEqual([0, '']);
    expect(stderr).toMatch(/^wanderlaw: wrote \d+ figures to figures\n$/);
    const files = readdirSync(join(place.path, 'figures'));
    const names = [...new Set(files.map((file) => file.replace(/\.\w+$/, '')))].sort();
    expect(files).toHaveLength(3 * names.length);
    expect(names).toEqual([
      '01-tracks',
      '02-visits-x',
      '03-displacement-memory',
      '04-drift-x-along-x',
      '05-diffusion-xx-along-x',
    ]);
    for (const name of names) {
      expect(read(`figures/${name}.svg`)).toMatch(/^<svg xmlns=/);
      const bytes = readFileSync(join(place.path, 'figures', `${name}.png`));
      expect(bytes.subarray(1, 4).toString('latin1')).toBe('PNG');
    }
    const [header, ...rows] = read('figures/05-diffusion-xx-along-x.csv').trimEnd().split('\n');
    expect(header).toBe(
      'x,diffusion_xx,diffusion_xx_low,diffusion_xx_high,diffusion_xx_band_low,diffusion_xx_band_high,visited',
    );
    expect(rows).toHaveLength(128);
    for (const row of rows) {
      const [, value, low, high, bandLow, bandHigh] = row.split(',').map(Number);
      expect(bandLow <= low && low <= value && value <= high && high <= bandHigh).toBe(true);
    }
  });

  it('lists what it wrote as JSON', async () => {
    const { status, stdout } = await type('report fit.json --figures deep/er -o report.html --json --quiet');
    expect(status).toBe(0);
    const result = JSON.parse(stdout) as { output: string; bytes: number; figures: string[] };
    expect(result.output).toBe('report.html');
    expect(result.bytes).toBe(Buffer.byteLength(read('report.html')));
    expect(result.figures).toHaveLength(15);
    for (const file of result.figures) expect(existsSync(join(place.path, file)), file).toBe(true);
  });

  it.each([
    ['report fit.json --tests fit.json -o r.html', /fit\.json/],
    ['report fit.json --challenges test-1.json -o r.html', /test-1\.json: checks/],
    ['report fit.json --tests missing.json -o r.html', /test result missing\.json cannot be read/],
    ['report fit.json --figures fit.json', /fit\.json cannot be made/],
    ['report fit.json --tests test-1.json -o test-1.json', /test-1\.json cannot be written: the same file/],
  ])('%s is refused in one sentence', async (line, sentence) => {
    const before = place.list();
    const { status, stdout, stderr } = await type(line);
    expect([status, stdout]).toEqual([2, '']);
    expect(stderr).toMatch(sentence);
    expect(stderr.trimEnd().split('\n')).toHaveLength(1);
    expect(place.list()).toEqual(before);
  });
});
