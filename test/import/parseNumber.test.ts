import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { classifyCell, parsePlainNumber } from '../../src/import/parseNumber.js';

const POINT = 46;
const COMMA = 44;

describe('numbers in cells', () => {
  it.each([
    ['+3', 3],
    ['-3', -3],
    ['1e-5', 1e-5],
    ['1.5E3', 1500],
    ['.5', 0.5],
    ['5.', 5],
    ['007', 7],
    ['1e+22', 1e22],
    ['1e23', 1e23],
    ['9007199254740993', 9007199254740992],
    ['0.30000000000000004', 0.30000000000000004],
    ['123456789012345678901234567890', 123456789012345678901234567890],
    ['0.000000000000000000000000000001', 1e-30],
    ['2.2250738585072011e-308', 2.2250738585072011e-308],
    ['4.9e-324', 5e-324],
    ['1e-400', 0],
    ['0e999999', 0],
  ])('%s is %d', (text, value) => {
    expect(parsePlainNumber(text, POINT)).toBe(value);
  });

  it.each([
    '',
    ' 1',
    '1 ',
    '12abc',
    '0x10',
    '0b1',
    '1e',
    '1e+',
    'e5',
    '.',
    '-',
    '+-1',
    '1.2.3',
    '1,5',
    '1_0',
    'NaN',
    '∞',
    '١',
  ])('%j is no plain number', (text) => {
    expect(parsePlainNumber(text, POINT)).toBeNaN();
  });

  it('every double is read to the last bit, from its shortest form and from forms of a fixed number of digits', () => {
    const same = (text: string): void => {
      expect(Object.is(parsePlainNumber(text, POINT), Number(text))).toBe(true);
    };
    fc.assert(
      fc.property(
        fc.double({ noNaN: true, noDefaultInfinity: true }),
        fc.integer({ min: 1, max: 20 }),
        (value, digits) => {
          same(Object.is(value, -0) ? '-0' : String(value));
          same(value.toPrecision(digits));
          same(value.toExponential(digits));
          if (Math.abs(value) < 1e20) same(value.toFixed(digits));
        },
      ),
      { numRuns: 5000 },
    );
    fc.assert(
      fc.property(
        fc.double({ min: -1e4, max: 1e4, noNaN: true }),
        fc.integer({ min: 0, max: 16 }),
        (value, digits) => {
          same(value.toFixed(digits));
          expect(parsePlainNumber(value.toFixed(digits).replace('.', ','), COMMA)).toBe(
            Number(value.toFixed(digits)),
          );
        },
      ),
      { numRuns: 5000 },
    );
  });

  it('cells that are no numbers are told apart', () => {
    const kinds = (cells: string[], mark = POINT): string[] => cells.map((cell) => classifyCell(cell, mark));
    expect(kinds([' 1.5 ', '\u00a02'])).toEqual(['number', 'number']);
    expect(kinds(['', '  ', 'nan', '-INF', '+Infinity', 'NA', '1e999', 'None'])).toEqual(
      Array(8).fill('missing'),
    );
    expect(kinds(['1,234', '1.234.567', "1'234", '12 345', '1,5', '1_000'])).toEqual(Array(6).fill('marks'));
    expect(kinds(['1.5'], COMMA)).toEqual(['marks']);
    expect(kinds(['abc', '12abc', '0x10', '1e', '12:30', '2026-01-01', '5%'])).toEqual(Array(7).fill('text'));
  });
});
