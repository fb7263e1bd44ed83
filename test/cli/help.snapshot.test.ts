import { describe, expect, it } from 'vitest';
import { COMMANDS } from '../../src/cli/commandTable.js';
import { OPTIONS } from '../../src/cli/options.js';
import { studySchema } from '../../src/documents/Study.js';
import { runInProcess } from './runInProcess.js';

describe('help', () => {
  it('of the program is as reviewed', async () => {
    const { status, stdout } = await runInProcess(['--help']);
    expect(status).toBe(0);
    expect(stdout).toMatchSnapshot();
  });

  for (const { name } of COMMANDS) {
    it(`of ${name} is as reviewed`, async () => {
      const { status, stdout, stderr } = await runInProcess([name, '--help']);
      expect([status, stderr]).toEqual([0, '']);
      expect(stdout).toMatchSnapshot();
    });
  }

  it('is the same under help COMMAND and COMMAND --help', async () => {
    expect(await runInProcess(['help', 'fit'])).toEqual(await runInProcess(['fit', '--help']));
  });

  it('states the defaults that the study has', () => {
    const defaults = studySchema.parse({}) as Record<string, unknown>;
    for (const option of Object.values(OPTIONS)) {
      if (!('study' in option) || !('default' in option)) continue;
      const value = defaults[option.study];
      if (typeof value === 'string' || typeof value === 'number') expect(option.default).toBe(String(value));
    }
  });

  it('covers every key of the study with an option', () => {
    const covered = Object.values(OPTIONS).flatMap((option) => ('study' in option ? [option.study] : []));
    const inFilesAlone = ['laws']; // a shelf of formulas is no matter for a command line
    expect([...new Set<string>([...covered, ...inFilesAlone])].sort()).toEqual(
      Object.keys(studySchema.shape).sort(),
    );
  });
});
