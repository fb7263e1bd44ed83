/** Cells to numbers: exact, quick for the usual cell, and able to say what is wrong with the others. */

const POWERS_OF_TEN = Float64Array.from({ length: 23 }, (_, k) => Number(`1e${k}`)); // all exact in double precision
const LARGEST_EXACT = 2 ** 53; // integers below it are exact in double precision
const MOST_DIGITS = 16; // more digits than that never stay below LARGEST_EXACT

/**
 * A plain decimal number: sign, digits with at most one decimal mark, exponent; nothing else, no blanks.
 *
 * Where the digits make an integer below 2⁵³ and the power of ten is at most 22 both are exact, and one division or
 * multiplication rounds correctly; every other number is left to `Number`.
 *
 * @param mark  character code of the decimal mark, or 0 where a mark is not to be accepted
 * @returns the correctly rounded value; NaN for anything else (then ask classifyCell)
 *
 * Source   Clinger, How to read floating point numbers accurately, PLDI (1990), section 3.
 */
export function parsePlainNumber(cell: string, mark: number): number {
  const length = cell.length;
  let place = 0;
  let code = length > 0 ? cell.charCodeAt(0) : 0;
  const negative = code === 45;
  if (negative || code === 43) place = 1;
  let mantissa = 0;
  let digits = 0; // significant ones
  let decimals = 0;
  let markSeen = false;
  let digitSeen = false;
  for (; place < length; place++) {
    code = cell.charCodeAt(place);
    if (code >= 48 && code <= 57) {
      digitSeen = true;
      mantissa = mantissa * 10 + (code - 48);
      if (mantissa > 0) digits++;
      if (markSeen) decimals++;
    } else if (code === mark && !markSeen) {
      markSeen = true;
    } else {
      break;
    }
  }
  if (!digitSeen) return NaN;
  let exponent = 0;
  if (place < length) {
    if (code !== 69 && code !== 101) return NaN;
    code = cell.charCodeAt(++place);
    const sign = code === 45 ? -1 : 1;
    if (code === 45 || code === 43) place++;
    if (place >= length) return NaN;
    for (; place < length; place++) {
      code = cell.charCodeAt(place);
      if (code < 48 || code > 57) return NaN;
      exponent = Math.min(exponent * 10 + (code - 48), 100_000);
    }
    exponent *= sign;
  }
  exponent -= decimals;
  if (digits <= MOST_DIGITS && mantissa < LARGEST_EXACT && exponent >= -22 && exponent <= 22) {
    const size = exponent < 0 ? mantissa / POWERS_OF_TEN[-exponent] : mantissa * POWERS_OF_TEN[exponent];
    return negative ? -size : size;
  }
  return Number(mark === 44 ? cell.replace(',', '.') : cell);
}

export type CellKind =
  /** A finite number. */
  | 'number'
  /** Empty, NaN, NA, infinite: a position that was not found. */
  | 'missing'
  /** Marks that group digits, or a decimal comma where commas separate cells. */
  | 'marks'
  /** Anything else. */
  | 'text';

const MISSING = /^(|[+-]?(nan|inf|infinity)|-?nan\(\w*\)|-?1\.#\w+|#?n\/?a|null|none|-{1,3}|\.)$/i;
const MARKS = /^[+-]?\d[\d.,'’_ \u00a0\u2009\u202f]*\d([eE][+-]?\d+)?$/;

/** What a cell holds that is not a plain finite number, blanks at its ends put aside. */
export function classifyCell(cell: string, mark: number): CellKind {
  const text = cell.trim();
  const value = parsePlainNumber(text, mark);
  if (Number.isFinite(value)) return 'number';
  if (!Number.isNaN(value) || MISSING.test(text)) return 'missing'; // a number too large for double precision is infinite
  return MARKS.test(text) ? 'marks' : 'text';
}
