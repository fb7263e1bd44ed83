/** Files of tests and challenges, as reports read them. */

import { describe, expect, test } from 'vitest';
import { parseChallengeResult, parseTestResults } from '../../src/documents/TestResult.js';
import { UsageError } from '../../src/errors.js';

const PLACE = { source: 'tests.json' };
const RESULT = {
  hypothesis: 'law',
  statistic: 3.2,
  p: 0.4,
  rejected: false,
  parameters: { g0: { value: 1, low: 0.5, high: 1.5 } },
  note: 'fits',
};

describe('test results', () => {
  test('are one result or a list of them; further keys are left alone', () => {
    const more = { ...RESULT, places: [{ place: [0] }] };
    expect(parseTestResults(more, PLACE)).toEqual([more]);
    expect(parseTestResults([RESULT, RESULT], PLACE)).toHaveLength(2);
  });

  test('may lack numbers that could not be told, and parameters', () => {
    const { parameters, ...bare } = RESULT;
    expect(parameters).toBeDefined();
    expect(parseTestResults({ ...bare, p: null, statistic: null }, PLACE)[0]).toMatchObject({
      p: null,
      parameters: {},
    });
    const open = { ...RESULT, parameters: { a: { value: 1, low: null, high: 2 } } };
    expect(parseTestResults(open, PLACE)[0].parameters.a.low).toBe(Number.NEGATIVE_INFINITY);
  });

  test.each([
    [{ ...RESULT, rejected: 'no' }, /^tests\.json: rejected: /],
    [{ ...RESULT, hypothesis: undefined }, /hypothesis/],
    [[RESULT, 3], /^tests\.json is not a test result/],
    ['text', /^tests\.json is not a test result/],
    [null, /^tests\.json is not a test result/],
  ])('anything else is refused by name', (value, sentence) => {
    expect(() => parseTestResults(value, PLACE)).toThrow(UsageError);
    expect(() => parseTestResults(value, PLACE)).toThrow(sentence);
  });
});

describe('challenge results', () => {
  test('are a list of checks', () => {
    const value = { checks: [{ name: 'memory', p: 0.4, holds: true, note: '' }], level: 0.05 };
    expect(parseChallengeResult(value, PLACE)).toEqual(value);
    expect(() => parseChallengeResult({ checks: {} }, PLACE)).toThrow(/checks/);
    expect(() => parseChallengeResult([], PLACE)).toThrow(/not a challenge result/);
  });
});
