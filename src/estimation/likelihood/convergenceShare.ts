/** A guess at how far scoring has come, from how small its steps have become: for people who wait, not for numbers. */

import type { ReportShare } from '../../numerics/ReportShare.js';

/** Share of the way at which coefficients have settled and only strengths still move. */
const SETTLED_SHARE = 0.5;

/**
 * Steps shrink about geometrically, so the logarithms of squared step length and of the largest change of a strength
 * fall about linearly from where they begin to their goals.
 *
 * What is told never falls.
 *
 * @returns  a function of both after an iteration; the change is infinite until coefficients have settled
 */
export function createConvergenceShare(
  report: ReportShare | undefined,
  decrementGoal: number,
  changeGoal: number,
): (decrement: number, change: number) => void {
  let firstDecrement = 0;
  let firstChange = 0;
  let told = 0;
  const tell = (share: number): void => {
    told = Math.max(told, share);
    report?.(told);
  };
  const wayOf = (value: number, first: number, goal: number): number =>
    value <= goal ? 1 : first <= goal ? 0 : Math.max(0, 1 - Math.log(value / goal) / Math.log(first / goal));
  return (decrement, change) => {
    firstDecrement = Math.max(firstDecrement, decrement);
    if (!Number.isFinite(change))
      return tell(SETTLED_SHARE * wayOf(decrement, firstDecrement, decrementGoal));
    firstChange = Math.max(firstChange, change);
    const way = Math.min(
      wayOf(change, firstChange, changeGoal),
      wayOf(decrement, firstDecrement, decrementGoal),
    );
    tell(SETTLED_SHARE + (1 - SETTLED_SHARE) * way);
  };
}
