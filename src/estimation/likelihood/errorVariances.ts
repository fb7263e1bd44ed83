/** The localization error variance each axis has under a parameter vector. */

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
