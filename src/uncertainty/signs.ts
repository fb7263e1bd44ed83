/** Friction, noise and diffusion must be positive; where an estimate is not, the user hears of it. */

import type { Warning } from '../errors.js';
import type { ColumnSpread } from './spread.js';

const POSITIVE = /^(friction|noise|diffusion)_(xx|yy|zz)$/;

/**
 * Warns of every column that is not positive somewhere in the visited region, with the worst place.
 *
 * @param centres  shape (m, d): the visited places at which `spreads` were measured
 */
export function warnOfSigns(
  spreads: readonly ColumnSpread[],
  centres: Float64Array,
  coordinates: readonly string[],
): Warning[] {
  const d = coordinates.length;
  return spreads.flatMap(({ name, values }) => {
    if (!POSITIVE.test(name)) return [];
    let worst = 0;
    let bad = 0;
    for (let place = 0; place < values.length; place++) {
      if (values[place] > 0) continue;
      bad++;
      if (values[place] <= values[worst]) worst = place;
    }
    if (bad === 0) return [];
    const where = coordinates
      .map((axis, i) => `${axis} = ${centres[worst * d + i].toPrecision(3)}`)
      .join(', ');
    return [
      {
        code: 'not-positive',
        message: `${name} comes out as ${values[worst].toPrecision(3)} at ${where} and is not positive in ${bad} of ${values.length} visited cells; the data cannot carry this many functions there`,
      },
    ];
  });
}
