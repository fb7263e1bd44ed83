/** Cells to numbers: exact, quick for the usual cell, and able to say what is wrong with the others. */

import { errorOfProduct } from '../numerics/accurateSum.js';

const POWERS_OF_TEN = Float64Array.from({ length: 23 }, (_, k) => Number(`1e${k}`)); // all exact in double precision
const BLOCK = 9; // decimal digits that fit a 32-bit integer

/**
 * A plain decimal number: sign, digits with at most one decimal mark, exponent; nothing else, no blanks.
 *
 * Up to 15 significant digits and a power of ten up to 22 are both exact in double precision, and one division or
 * multiplication rounds correctly (Clinger). Up to 18 digits are held as a sum of two doubles and divided with the
 * remainder (divideRounded). Everything else is left to `Number`.
 *
 * @param mark  character code of the decimal mark, or 0 where a mark is not to be accepted
 * @param start  where in the text the number begins (included)
 * @param end  where it ends (excluded)
 * @returns the correctly rounded value; NaN for anything else (then ask classifyCell)
 *
 * Source   Clinger, How to read floating point numbers accurately, PLDI (1990), section 3.
 */
export function parsePlainNumber(text: string, mark: number, start = 0, end = text.length): number {
  let place = start;
  let code = end > start ? text.charCodeAt(start) : 0;
  const negative = code === 45;
  if (negative || code === 43) place++;
  let first = 0; // the first nine significant digits
  let second = 0; // the next nine
  let digits = 0; // significant ones
  let markPlace = -1;
  let digitSeen = false;
  for (; place < end; place++) {
    code = text.charCodeAt(place);
    const digit = code - 48;
    if (digit >= 0 && digit <= 9) {
      digitSeen = true;
      if (digits < BLOCK) first = (Math.imul(first, 10) + digit) | 0;
      else if (digits < 2 * BLOCK) second = (Math.imul(second, 10) + digit) | 0;
      if (first !== 0) digits++;
    } else if (code === mark && markPlace === -1) {
      markPlace = place;
    } else {
      break;
    }
  }
  if (!digitSeen) return NaN;
  let exponent = markPlace === -1 ? 0 : markPlace + 1 - place;
  if (place < end) {
    const given = parseExponent(text, place, end);
    if (given !== given) return NaN;
    exponent += given;
  }
  let size: number;
  if (exponent < -22 || exponent > 22 || digits > 2 * BLOCK) {
    return readByLibrary(text.slice(start, end), mark);
  }
  const shift = digits > BLOCK ? POWERS_OF_TEN[digits - BLOCK] : 1;
  if (digits <= 15) {
    const mantissa = first * shift + second;
    size = exponent < 0 ? mantissa / POWERS_OF_TEN[-exponent] : mantissa * POWERS_OF_TEN[exponent];
  } else {
    size = exponent <= 0 ? divideRounded(first, shift, second, POWERS_OF_TEN[-exponent]) : NaN;
    if (size !== size) return readByLibrary(text.slice(start, end), mark);
  }
  return negative ? -size : size;
}

function readByLibrary(cell: string, mark: number): number {
  return Number(mark === 44 ? cell.replace(',', '.') : cell);
}

/** The power of ten behind `e` or `E` at the given place; NaN where there is anything else. */
function parseExponent(text: string, place: number, end: number): number {
  let code = text.charCodeAt(place);
  if (code !== 69 && code !== 101) return NaN;
  code = ++place < end ? text.charCodeAt(place) : 0;
  const negative = code === 45;
  if (negative || code === 43) place++;
  if (place >= end) return NaN;
  let exponent = 0;
  for (; place < end; place++) {
    code = text.charCodeAt(place);
    if (code < 48 || code > 57) return NaN;
    exponent = Math.min(exponent * 10 + (code - 48), 100_000); // far beyond any double, safe from overflow
  }
  return negative ? -exponent : exponent;
}

const DOUBT = 2 ** -50; // relative error of the correction below, generously

/**
 * (first · shift + second) / divisor, correctly rounded, or NaN where that is in doubt.
 *
 * The numerator is held exactly as high + low; quotient q = high / divisor; its remainder r = high − q divisor + low
 * is exact up to its own rounding, and the answer is q + r / divisor. Where an error of the correction as large as
 * DOUBT could turn the last bit, a tie is near: NaN.
 *
 * @param first  integer, 0 to 10⁹;  @param shift  power of ten up to 10⁹;  @param second  integer below `shift`
 * @param divisor  power of ten up to 10²²
 *
 * Source   error-free product and sum: Dekker (see numerics/accurateSum).
 */
function divideRounded(first: number, shift: number, second: number, divisor: number): number {
  const product = first * shift;
  const productError = errorOfProduct(first, shift, product);
  const high = product + second; // product ≥ second
  const low = second - (high - product) + productError;
  const quotient = high / divisor;
  const multiple = quotient * divisor;
  const remainder = high - multiple - errorOfProduct(quotient, divisor, multiple) + low;
  const correction = remainder / divisor;
  const below = quotient + correction * (1 - DOUBT);
  return below === quotient + correction * (1 + DOUBT) ? below : NaN;
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
