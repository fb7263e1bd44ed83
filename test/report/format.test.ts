/** Numbers and units as people read them. */

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { createColumnFormat } from '../../src/report/columnFormat.js';
import {
  axisExponent,
  formatAxisLabel,
  formatCount,
  formatInterval,
  formatNumber,
  formatP,
  formatPercent,
  formatQuantity,
  formatRange,
  formatSetting,
  formatWithError,
  joinUnit,
  parseColumnName,
  tameUnits,
} from '../../src/report/format.js';

const METRES = { length: 'm', time: 's' };

/** The number a text stands for, read as a person would. */
function read(text: string): number {
  const match = /^(−?[\d.]+)(?: × 10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+))?$/.exec(text);
  if (!match) throw new Error(`not a number: ${text}`);
  const exponent = [...(match[2] ?? '⁰')].map((sign) => '⁰¹²³⁴⁵⁶⁷⁸⁹'.indexOf(sign));
  const size = Number(exponent.filter((digit) => digit >= 0).join(''));
  return Number(match[1].replace('−', '-')) * 10 ** (match[2]?.startsWith('⁻') ? -size : size);
}

describe('single numbers', () => {
  test.each([
    [0, '0'],
    [1, '1.00'],
    [-0.04567, '−0.0457'],
    [12345, '12300'],
    [123456, '1.23 × 10⁵'],
    [0.00012345, '1.23 × 10⁻⁴'],
    [-4.1e-13, '−4.10 × 10⁻¹³'],
    [0.9996, '1.00'],
    [99.96e-9, '1.00 × 10⁻⁷'],
    [Number.NaN, 'unknown'],
    [Number.POSITIVE_INFINITY, 'infinite'],
    [Number.NEGATIVE_INFINITY, '−infinite'],
  ])('%d is written %s', (value, text) => {
    expect(formatNumber(value)).toBe(text);
  });

  test('what is read back differs by at most half of the last digit', () => {
    fc.assert(
      fc.property(
        fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e12, max: 1e12 }),
        fc.integer({ min: 1, max: 6 }),
        (value, digits) => {
          fc.pre(Math.abs(value) > 1e-20);
          const back = read(formatNumber(value, digits));
          // 5.0001: the half itself, and round-off of the conversion
          expect(Math.abs(back - value)).toBeLessThanOrEqual(5.0001 * 10 ** -digits * Math.abs(value));
        },
      ),
      { seed: 1, numRuns: 500 },
    );
  });

  test.each([
    [0.05, '0.05'],
    [0.1 + 0.2, '0.3'],
    [1 / 3, '0.333333'],
    [-2.5e-7, '−2.5 × 10⁻⁷'],
    [3e6, '3 × 10⁶'],
    [0, '0'],
  ])('the setting %d is written %s', (value, text) => {
    expect(formatSetting(value)).toBe(text);
  });

  test.each([
    [0.0004, '< 0.001'],
    [0.0123, '0.012'],
    [0.456, '0.46'],
    [1, '1.00'],
    [Number.NaN, 'unknown'],
  ])('p %d is written %s', (value, text) => {
    expect(formatP(value)).toBe(text);
  });

  test('counts in groups of three, shares in percent', () => {
    expect(formatCount(1234567)).toBe('1\u202f234\u202f567');
    expect(formatCount(999)).toBe('999');
    expect([0, 0.0123, 0.5, 1].map(formatPercent)).toEqual([
      '0\u00a0%',
      '1.2\u00a0%',
      '50\u00a0%',
      '100\u00a0%',
    ]);
  });
});

describe('numbers that belong together', () => {
  test('a value with its error, both to the second digit of the error', () => {
    expect(formatWithError(1.23456, 0.0213)).toBe('1.235 ± 0.021');
    expect(formatWithError(4.123e-13, 8.1e-15)).toBe('(4.123 ± 0.081) × 10⁻¹³');
    expect(formatWithError(1234, 99.6)).toBe('1230 ± 100');
    expect(formatWithError(2, Number.NaN)).toBe('2.000');
  });

  test('a value with its interval, all to one place', () => {
    expect(formatInterval(1.2345, 1.1, 1.36)).toBe('1.23 (1.10 to 1.36)');
    expect(formatInterval(-4.5e-8, -7.5e-8, -1.5e-8)).toBe('−4.5 (−7.5 to −1.5) × 10⁻⁸');
    expect(formatInterval(3, Number.NaN, 4)).toBe('3.000');
    expect(formatInterval(3, 0.4, Number.POSITIVE_INFINITY)).toBe('3.00 (above 0.400)');
    expect(formatInterval(3, Number.NEGATIVE_INFINITY, 4)).toBe('3.00 (below 4.00)');
    expect(formatInterval(3, Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY)).toBe('3.000');
  });

  test('a range with one power of ten', () => {
    expect(formatRange(-7.36e-8, 1.7e-7)).toBe('−0.74 to 1.70 × 10⁻⁷');
    expect(formatRange(0.4, 1.006)).toBe('0.40 to 1.01');
    expect(formatRange(-1e-9, 5)).toBe('0.00 to 5.00');
    expect(formatRange(1, 2, 2, ' … ')).toBe('1.0 … 2.0');
  });

  test('a column with one power of ten and as many decimals as its typical error needs', () => {
    const column = createColumnFormat([1.16e-7, -7.3e-8, 2.4e-9], [2e-8, 3e-8, 4e-8]);
    expect(column.exponent).toBe(-7);
    expect([1.16e-7, -7.3e-8, -4e-12].map(column.format)).toEqual(['1.16', '−0.73', '0.00']);
    const plain = createColumnFormat([0.2, 12.5]);
    expect([plain.exponent, plain.format(12.5)]).toEqual([0, '12.5']);
    expect(plain.format(Number.NaN)).toBe('unknown');
  });
});

describe('units', () => {
  test('stand on the same line as their number', () => {
    expect(formatQuantity(0.25, 'force', METRES)).toBe('0.250\u00a0m\u00a0s⁻²');
    expect(joinUnit('1 to 2', 'temperature', { length: 'µm', time: 'h' })).toBe('1 to 2\u00a0µm²\u00a0h⁻²');
    expect(formatQuantity(2, 'force', { length: null, time: 's' })).toBe('2.00');
  });

  test('label axes, with the power of ten taken out of the numbers', () => {
    expect(axisExponent([0, -4.2e-7])).toBe(-7);
    expect([axisExponent([9999]), axisExponent([10000]), axisExponent([0.01]), axisExponent([0])]).toEqual([
      0, 4, 0, 0,
    ]);
    expect(formatAxisLabel('diffusion', 'diffusion', METRES, -13)).toBe('diffusion (10⁻¹³ m² s⁻¹)');
    expect(formatAxisLabel('x', 'position', { length: null, time: null })).toBe('x (table units)');
    expect(formatAxisLabel('friction', 'friction', { length: null, time: 'h' })).toBe('friction (h⁻¹)');
    expect(formatAxisLabel('curl', 'forceCurl', METRES)).toBe('curl (s⁻²)');
  });

  test('from files are tamed: one line, at most 12 characters, nothing where nothing is left', () => {
    const units = tameUnits({ length: '\u202e', time: 'a very long unit of time' });
    expect(units.length).toBeNull();
    expect([...(units.time ?? '')]).toHaveLength(12);
  });

  test('columns say their quantity and component', () => {
    expect(parseColumnName('friction_xy')).toEqual({ quantity: 'friction', component: 'xy' });
    for (const name of ['friction', 'visited_x', 'friction_w', '__proto___x'])
      expect(parseColumnName(name)).toBeNull();
  });
});
