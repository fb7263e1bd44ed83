/** Where the localization errors of a pass come from. */

import type { TrackSet } from '../../tracks/TrackSet.js';
import type { LikelihoodLayout } from './layout.js';
import type { PassSetting } from './PathPass.js';

/** Writes the variances that hold for all positions alike (length²); untouched where every position has its own. */
export function readErrorVariances(
  layout: LikelihoodLayout,
  setting: PassSetting,
  parameters: Float64Array,
  out: Float64Array,
): void {
  for (let axis = 0; axis < layout.dimensions; axis++) {
    if (layout.errorOffset >= 0) out[axis] = Math.exp(parameters[layout.errorOffset + axis]);
    else if (setting.knownError) out[axis] = setting.knownError[axis] ** 2;
  }
}

/** Standard deviations of every position, shape (n, d), where they come from the table; null where axes have one each. */
export function pointErrorsOf(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
): Float64Array | null {
  return layout.errorOffset < 0 && setting.knownError === null ? tracks.localizationErrors : null;
}
