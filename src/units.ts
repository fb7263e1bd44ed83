/**
 * Units are labels: all arithmetic is done in the units of the (scaled) table. This module knows with which powers
 * of length, time and mass each quantity carries them.
 */

export interface Units {
  /** Label of the length unit, or null where the user gave none. */
  readonly length: string | null;
  /** Label of the time unit, or null where the user gave none. */
  readonly time: string | null;
}

export const NO_UNITS: Units = { length: null, time: null };

/** Powers of length and time (per unit mass) of every quantity that is reported. */
export const QUANTITY_POWERS = {
  position: [1, 0],
  time: [0, 1],
  velocity: [1, -1],
  force: [1, -2],
  friction: [0, -1],
  noise: [2, -3],
  temperature: [2, -2],
  drift: [1, -1],
  diffusion: [2, -1],
  forceCurl: [0, -2],
  driftCurl: [0, -1],
} as const satisfies Record<string, readonly [number, number]>;

export type Quantity = keyof typeof QUANTITY_POWERS;

const SUPERSCRIPTS: Record<string, string> = { '-': '⁻', '1': '¹', '2': '²', '3': '³' };

function power(label: string, exponent: number): string {
  if (exponent === 0) return '';
  if (exponent === 1) return label;
  return label + [...String(exponent)].map((digit) => SUPERSCRIPTS[digit] ?? digit).join('');
}

/**
 * The unit of a quantity in words fit for an axis label, e.g. `µm² h⁻³`.
 *
 * @returns the empty string where the quantity needs a unit the user did not name
 */
export function formatUnit(quantity: Quantity, units: Units): string {
  const [lengthPower, timePower] = QUANTITY_POWERS[quantity];
  if ((lengthPower !== 0 && units.length === null) || (timePower !== 0 && units.time === null)) return '';
  return [power(units.length ?? '', lengthPower), power(units.time ?? '', timePower)]
    .filter(Boolean)
    .join(' ');
}
