/**
 * Mislinked jumps: steps too long for the largest of so many innovations of the model.
 *
 * With r² the squared innovation summed over the axes, the largest of n independent ones exceeds R² by chance with
 * probability 1 − (1 − P(χ²_d > R²))ⁿ.
 *
 * Source  Barnett & Lewis, Outliers in Statistical Data (3rd ed. 1994), ch. 6; the search for single steps:
 *         `findSuspectJumps`.
 */

import { chiSquareTail } from '../../numerics/special/chiSquareTail.js';
import { findSuspectJumps } from '../../momenta/suspectJumps.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { Finding } from './Finding.js';
import type { Innovations } from './innovations.js';

const NAMED = 3; // steps named in the note

export function checkJumps({ tracks, values }: Innovations): Finding {
  const d = tracks.dimensions;
  let largest = 0;
  let count = 0;
  let worst = 0;
  for (let row = 0; row < values.length / d; row++) {
    let square = 0;
    for (let axis = 0; axis < d; axis++) square += values[row * d + axis] ** 2;
    if (square !== square) continue;
    count++;
    if (square > largest) {
      largest = square;
      worst = row;
    }
  }
  const tail = chiSquareTail(largest, d);
  const p = -Math.expm1(count * Math.log1p(-tail));
  const suspects = findSuspectJumps(tracks);
  const named = [...new Set([worst - 1, ...suspects])].filter((row) => row >= 0).slice(0, NAMED);
  return {
    name: 'mislinked-jumps',
    assumption: 'no step is a wrong link between tracks',
    statistic: Math.sqrt(largest),
    p,
    effect: { name: 'steps far out of line with their neighbours', value: suspects.length, error: null },
    found: `the step that stands out most is ${Math.sqrt(largest).toFixed(1)} standard deviations long; ${suspects.length} ${suspects.length === 1 ? 'step is' : 'steps are'} far out of line with their neighbours (${named.map((row) => nameRow(tracks, row)).join('; ')})`,
    advice:
      'look at these steps in the images; cut the tracks there (give the parts different track names) and fit again',
  };
}

function nameRow({ trackNames, trackOffsets, times }: TrackSet, row: number): string {
  let track = 0;
  while (row >= trackOffsets[track + 1]) track++;
  return `track ${trackNames[track]} at time ${Number(times[row].toPrecision(6))}`;
}
