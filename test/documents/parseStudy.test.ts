import { describe, expect, it } from 'vitest';
import { formatSuggestion } from '../../src/cli/suggest.js';
import { completeStudy, parseStudyInput } from '../../src/documents/parseStudy.js';
import { UsageError } from '../../src/errors.js';

const read = (value: unknown) => parseStudyInput(value, { source: 'study.json', suggest: formatSuggestion });

describe('a study file', () => {
  it('may leave out every key', () => {
    expect(read({})).toEqual({});
    expect(completeStudy({}).replicates).toBe(200);
  });

  const mistakes: readonly [unknown, RegExp][] = [
    [{ replicatse: 100 }, /study\.json: "replicatse" is not a key of a study; did you mean replicates\?/],
    [{ qqqqqqqq: 1 }, /"qqqqqqqq" is not a key of a study; remove it/],
    [{ replicates: 'many' }, /study\.json: replicates: expected (int|number)/],
    [{ order: 'third' }, /study\.json: order: .*first/],
    [{ localizationError: -1 }, /study\.json: localizationError/],
    [{ units: { lenght: 'm', time: 's' } }, /units/],
    [[], /holds no JSON object/],
    [null, /holds no JSON object/],
    ['text', /holds no JSON object/],
  ];
  for (const [value, sentence] of mistakes) {
    it(`is refused in a sentence: ${JSON.stringify(value)}`, () => {
      expect(() => read(value)).toThrow(UsageError);
      expect(() => read(value)).toThrow(sentence);
    });
  }
});
