import type { TrackSet } from '../../tracks/TrackSet.js';
import { createFirstOrderPass } from './firstOrderPass.js';
import { createJointPass } from './joint/jointPass.js';
import type { LikelihoodLayout } from './layout.js';
import type { PassSetting, PathPass } from './PathPass.js';
import { createSecondOrderPass } from './secondOrderPass.js';

/** Whether states have to be filtered together: axes mix, or positions are means over an exposure. */
export function isJoint({ friction, noise }: LikelihoodLayout, exposure: number): boolean {
  return exposure > 0 || friction?.field.form === 'matrix' || noise.field.form === 'matrix';
}

/**
 * The pass for a layout: axis by axis where that will do.
 *
 * @param exposure  fraction of the sampling interval
 */
export function createPathPass(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
  exposure: number,
): PathPass {
  if (isJoint(layout, exposure)) return createJointPass(tracks, layout, setting, exposure);
  const create = layout.model.order === 'second' ? createSecondOrderPass : createFirstOrderPass;
  return create(tracks, layout, setting);
}
