import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { editDistance, suggestName } from '../../src/numerics/text/suggestName.js';

describe('suggestions for mistyped names', () => {
  it('the nearest name is suggested, in any case, and none that is far', () => {
    expect(suggestName('posx', ['ID', 'PosX', 'PosY'])).toBe('PosX');
    expect(suggestName('trakc', ['time', 'track'])).toBe('track');
    expect(suggestName('tme', ['x', 'time'])).toBe('time');
    expect(suggestName('velocity', ['ID', 'PosX', 'PosY'])).toBeNull();
    expect(suggestName('a', [])).toBeNull();
    expect(suggestName('tahn', ['tan', 'tanh'])).toBe('tanh'); // swapped letters, not one too many
  });

  it('edit distances are those of worked examples', () => {
    expect(editDistance('kitten', 'sitting')).toBe(3); // the usual textbook example, from memory
    expect(editDistance('ca', 'abc')).toBe(3); // optimal string alignment edits no substring twice
    expect(editDistance('ab', 'ba')).toBe(1);
    expect(editDistance('', 'abc')).toBe(3);
  });

  it('edit distance is symmetric and zero only between equals', () => {
    const word = fc.string({ maxLength: 6, unit: fc.constantFrom('a', 'b', 'c') });
    fc.assert(
      fc.property(word, word, (a, b) => {
        expect(editDistance(a, b)).toBe(editDistance(b, a));
        expect(editDistance(a, b) === 0).toBe(a === b);
      }),
    );
  });
});
