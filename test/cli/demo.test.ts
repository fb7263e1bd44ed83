import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

describe('demo', () => {
  it('does the whole job and tells what it wrote', async () => {
    const { status, stdout, stderr } = await place.run(['demo', 'settling-beads', '--workers', '1']);
    expect([status, stderr]).toEqual([0, '']);
    for (const name of [
      'survey.json',
      'fit.json',
      'tests.json',
      'challenge.json',
      'resimulation.json',
      'scenario.json',
      'report.html',
    ]) {
      const file = join('out', 'settling-beads', name);
      expect(stdout).toContain(file);
      expect(existsSync(join(place.path, file)), file).toBe(true);
    }
    const fit = JSON.parse(readFileSync(join(place.path, 'out/settling-beads/fit.json'), 'utf8')) as unknown;
    expect(fit).toMatchObject({ study: { order: 'first', units: { length: 'm', time: 's' } } });
    expect(place.list()).toEqual(['out']);

    const page = readFileSync(join(place.path, 'out/settling-beads/report.html'), 'utf8');
    for (const section of ['tests', 'resimulation', 'scenario']) expect(page).toContain(`id="${section}"`);
    // Diffusion is hindered near the floor (datasets/truth.ts), and the recording was made by the model itself.
    expect(page).toContain('The noise is equally strong everywhere');
    const tests = JSON.parse(
      readFileSync(join(place.path, 'out/settling-beads/tests.json'), 'utf8'),
    ) as unknown;
    expect(tests).toMatchObject([
      { hypothesis: 'uniform-noise', rejected: true },
      { hypothesis: 'zero-force' },
    ]);
    expect(page).toContain('Assumptions of the model');
  });
});
