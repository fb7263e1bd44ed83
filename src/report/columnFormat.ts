/** Numbers of a table column, written so that they can be compared: one power of ten and one decimal place for all. */

import { axisExponent, formatNumber } from './format.js';

export interface ColumnFormat {
  /** Power of ten taken out of the column, for its heading; 0 where none is. */
  readonly exponent: number;
  readonly format: (value: number) => string;
}

/**
 * @param values  the numbers of the column
 * @param errors  their half-widths, where they have some: the typical one is written to two digits
 */
export function createColumnFormat(values: readonly number[], errors: readonly number[] = []): ColumnFormat {
  const exponent = axisExponent(values);
  const factor = 10 ** -exponent;
  const known = errors.filter((error) => Number.isFinite(error) && error > 0).sort((a, b) => a - b);
  const largest = Math.max(...values.filter(Number.isFinite).map(Math.abs), 0) * factor;
  // Without errors three digits of the largest number say enough.
  const place =
    known.length > 0
      ? Math.floor(Math.log10((known[Math.floor(known.length / 2)] ?? 1) * factor)) - 1
      : Math.floor(Math.log10(largest || 1)) - 2;
  const decimals = Math.min(8, Math.max(0, -place));
  return {
    exponent,
    format: (value) => {
      if (!Number.isFinite(value)) return formatNumber(value);
      const text = (value * factor).toFixed(decimals);
      return (/^-0(\.0*)?$/.test(text) ? text.slice(1) : text).replace('-', '−');
    },
  };
}
