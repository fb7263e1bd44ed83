import { describe, expect, it } from 'vitest';
import { parseFit } from '../../src/documents/parseFit.js';
import { UsageError } from '../../src/errors.js';
import { exampleFit } from '../support/fitFixtures.js';

const read = (value: unknown) => parseFit(value, { source: 'fit.json' });

describe('a fit file', () => {
  it('comes back as it was written', () => {
    const fit = exampleFit();
    expect(read(JSON.parse(JSON.stringify(fit)))).toEqual(fit);
  });

  it('is refused under another format, and the format is named', () => {
    expect(() => read({ format: 'wanderlaw-scenario' })).toThrow(
      /not a fit file: its format is "wanderlaw-scenario"/,
    );
    expect(() => read({})).toThrow(/not a fit file: it has no format/);
    expect(() => read([1, 2])).toThrow(UsageError);
  });

  it('is refused where a part is missing', () => {
    expect(() => read({ ...exampleFit(), model: undefined })).toThrow(/fit\.json: model/);
  });

  it('is refused where its sizes do not agree', () => {
    const fit = exampleFit();
    const uncertainty = { ...fit.uncertainty, replicates: [...fit.uncertainty.replicates, [1]] };
    expect(() => read({ ...fit, uncertainty })).toThrow(/a replicate has 1 coefficients/);
    const visited = { ...fit.visited, counts: [1] };
    expect(() => read({ ...fit, visited })).toThrow(/visited/);
  });
});
