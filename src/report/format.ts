/** Numbers and units as people read them. */

import { formatUnit, type Quantity, QUANTITY_POWERS, type Units } from '../units.js';
import { tameText } from './html.js';

const SUPERSCRIPTS = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];

/** A power of ten in raised digits, e.g. `10⁻¹³`. */
export function formatPowerOfTen(exponent: number): string {
  const digits = [...String(Math.abs(exponent))]
    .map((digit) => SUPERSCRIPTS[Number(digit)] ?? digit)
    .join('');
  return `10${exponent < 0 ? '⁻' : ''}${digits}`;
}

/** Decimal exponent of the leading digit; 0 for zero. */
function leadingExponent(value: number): number {
  return value === 0 || !Number.isFinite(value) ? 0 : Math.floor(Math.log10(Math.abs(value)) + 1e-12);
}

const withMinus = (text: string) => text.replace('-', '−');

/** Is a number of this decimal exponent easier to read with a power of ten? */
function wantsPower(exponent: number): boolean {
  return exponent >= 5 || exponent <= -4;
}

/**
 * A number to `digits` significant digits with a true minus sign, and with a power of ten outside 10⁻³ … 10⁵.
 * Infinite and undefined numbers become words.
 */
export function formatNumber(value: number, digits = 3): string {
  if (Number.isNaN(value)) return 'unknown';
  if (!Number.isFinite(value)) return value > 0 ? 'infinite' : '−infinite';
  if (value === 0) return '0';
  // Rounding may carry into the next power (9.96 → 10.0), so the exponent is that of the rounded number.
  const rounded = Number(value.toPrecision(digits));
  const exponent = leadingExponent(rounded);
  if (wantsPower(exponent)) {
    return withMinus(`${(rounded / 10 ** exponent).toFixed(digits - 1)} × ${formatPowerOfTen(exponent)}`);
  }
  return withMinus(rounded.toFixed(Math.min(20, Math.max(0, digits - 1 - leadingExponent(rounded)))));
}

/** A number somebody chose, such as an interval of time: up to six digits, without zeros at the end. */
export function formatSetting(value: number): string {
  if (!Number.isFinite(value) || value === 0) return formatNumber(value, 1);
  const rounded = Number(value.toPrecision(6));
  const exponent = leadingExponent(rounded);
  if (!wantsPower(exponent)) return withMinus(String(rounded));
  return withMinus(`${Number((rounded / 10 ** exponent).toPrecision(6))} × ${formatPowerOfTen(exponent)}`);
}

/** The ends of a range, with the same decimal place and one power of ten: `−0.74 to 1.70 × 10⁻⁷`. */
export function formatRange(low: number, high: number, digits = 3, between = ' to '): string {
  if (!Number.isFinite(low) || !Number.isFinite(high))
    return `${formatNumber(low, digits)}${between}${formatNumber(high, digits)}`;
  const largest = Math.max(Math.abs(low), Math.abs(high));
  const exponent = leadingExponent(largest);
  const power = wantsPower(exponent) ? exponent : 0;
  const scaled = Number((largest / 10 ** power).toPrecision(digits));
  const decimals = Math.min(20, Math.max(0, digits - 1 - leadingExponent(scaled)));
  const round = (value: number) => withMinus(avoidMinusZero((value / 10 ** power).toFixed(decimals)));
  const text = `${round(low)}${between}${round(high)}`;
  return power === 0 ? text : `${text} × ${formatPowerOfTen(power)}`;
}

const avoidMinusZero = (text: string) => (/^-0(\.0*)?$/.test(text) ? text.slice(1) : text);

/** A whole number with thin spaces between thousands. */
export function formatCount(value: number): string {
  return withMinus(String(Math.round(value))).replace(/\B(?=(\d{3})+(?!\d))/g, '\u202f');
}

/**
 * A value with its standard error or half-width, both to the second significant digit of the error:
 * `1.234 ± 0.021`, `(4.12 ± 0.08) × 10⁻¹³`.
 *
 * @param error  ≥ 0; where it is zero or not finite the value alone is written to four digits
 */
export function formatWithError(value: number, error: number): string {
  if (!Number.isFinite(value) || !Number.isFinite(error) || error <= 0) return formatNumber(value, 4);
  const exponent = leadingExponent(Math.max(Math.abs(value), error));
  const power = wantsPower(exponent) ? exponent : 0;
  const scaledValue = value / 10 ** power;
  const scaledError = error / 10 ** power;
  // Rounding may carry (0.0996 → 0.10), so the place is taken from the rounded error.
  const place = leadingExponent(Number(scaledError.toPrecision(2))) - 1;
  const decimals = Math.min(20, Math.max(0, -place));
  const round = (number: number) =>
    withMinus(
      avoidMinusZero((place > 0 ? Math.round(number / 10 ** place) * 10 ** place : number).toFixed(decimals)),
    );
  const text = `${round(scaledValue)} ± ${round(scaledError)}`;
  return power === 0 ? text : `(${text}) × ${formatPowerOfTen(power)}`;
}

/**
 * A value with the ends of its interval: `1.23 (1.10 to 1.36)`, all to the same decimal place; `1.23 (above 0.40)` where
 * one end is infinite.
 */
export function formatInterval(value: number, low: number, high: number): string {
  const halfWidth = (high - low) / 2;
  const isOpen = (low === Number.NEGATIVE_INFINITY) !== (high === Number.POSITIVE_INFINITY);
  if (isOpen && Number.isFinite(value))
    return `${formatNumber(value)} (${low < high && Number.isFinite(low) ? `above ${formatNumber(low)}` : `below ${formatNumber(high)}`})`;
  if (![value, low, high].every(Number.isFinite) || halfWidth <= 0) return formatNumber(value, 4);
  const exponent = leadingExponent(Math.max(Math.abs(value), Math.abs(low), Math.abs(high)));
  const power = wantsPower(exponent) ? exponent : 0;
  const place = leadingExponent(Number((halfWidth / 10 ** power).toPrecision(2))) - 1;
  const decimals = Math.min(20, Math.max(0, -place));
  const round = (number: number) => withMinus(avoidMinusZero((number / 10 ** power).toFixed(decimals)));
  const text = `${round(value)} (${round(low)} to ${round(high)})`;
  return power === 0 ? text : `${text} × ${formatPowerOfTen(power)}`;
}

/** A p-value: two digits, and `< 0.001` below. */
export function formatP(p: number): string {
  if (!Number.isFinite(p)) return 'unknown';
  return p < 0.001 ? '< 0.001' : p.toFixed(p < 0.1 ? 3 : 2);
}

/** A share as a percentage of two digits. */
export function formatPercent(share: number): string {
  if (!Number.isFinite(share)) return 'unknown';
  const percent = share * 100;
  return `${percent >= 10 || percent === 0 ? Math.round(percent) : Number(percent.toPrecision(2))}\u00a0%`;
}

/** The power of ten taken out of an axis, so that its numbers stay short: 0 within 10⁻² … 10⁴. */
export function axisExponent(values: ArrayLike<number>): number {
  let largest = 0;
  for (let i = 0; i < values.length; i++) {
    const size = Math.abs(values[i] ?? 0);
    if (Number.isFinite(size) && size > largest) largest = size;
  }
  const exponent = leadingExponent(largest);
  return exponent >= 4 || exponent <= -3 ? exponent : 0;
}

/** Length and time labels made safe for axes: one line, at most 12 characters. */
export function tameUnits(units: Units): Units {
  const tame = (label: string | null) =>
    label === null || tameText(label) === '' ? null : tameText(label, 12);
  return { length: tame(units.length), time: tame(units.time) };
}

/** An axis label: name, power of ten and unit, e.g. `diffusion (10⁻¹³ m² s⁻¹)`. */
export function formatAxisLabel(name: string, quantity: Quantity, units: Units, exponent = 0): string {
  const inside = [exponent === 0 ? '' : formatPowerOfTen(exponent), formatUnit(quantity, tameUnits(units))];
  const text = inside.filter(Boolean).join(' ');
  if (text !== '') return `${name} (${text})`;
  return units.length === null && units.time === null ? `${name} (table units)` : name;
}

/** A text followed by the unit of a quantity, on the same line. */
export function joinUnit(text: string, quantity: Quantity, units: Units): string {
  const unit = formatUnit(quantity, tameUnits(units));
  return unit === '' ? text : `${text}\u00a0${unit.replaceAll(' ', '\u00a0')}`;
}

/** A number followed by the unit of its quantity. */
export function formatQuantity(value: number, quantity: Quantity, units: Units, digits = 3): string {
  return joinUnit(formatNumber(value, digits), quantity, units);
}

const SUFFIX = /^([a-z]+)_([xyz]+)$/;

/** Quantity and component of a column name such as `friction_xx`; null for names of no known quantity. */
export function parseColumnName(name: string): { quantity: Quantity; component: string } | null {
  const match = SUFFIX.exec(name);
  const quantity = match?.[1];
  const component = match?.[2];
  if (quantity === undefined || component === undefined || !(quantity in QUANTITY_POWERS)) return null;
  return { quantity: quantity as Quantity, component };
}
