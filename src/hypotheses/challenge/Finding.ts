/** What one check finds, before the checks are corrected for their number. */

import type { CheckName, Effect } from './ChallengeResult.js';

export interface Finding {
  readonly name: CheckName;
  readonly assumption: string;
  readonly statistic: number;
  readonly p: number;
  readonly effect: Effect;
  /** The finding in words, for either verdict. */
  readonly found: string;
  /** What to do where the assumption fails. */
  readonly advice: string;
}

/** A check that says nothing here. */
export interface Skipped {
  readonly name: CheckName;
  readonly reason: string;
}

export function isSkipped(result: Finding | Skipped): result is Skipped {
  return 'reason' in result;
}
