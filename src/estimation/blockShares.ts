/**
 * What few blocks ask for. Where the estimate follows a block its residuals are small; with H_b the share of block b in an
 * estimate (ΣH_b = 1), its effect has to grow by 1/(1 − H_b), which is what leaving the block out would show. And the
 * spread over so few is itself uncertain: intervals grow by the ratio of Student's quantiles for the freedom 1/ΣH_b² − 1
 * that is left and B − 1 of the whole. Where B blocks have equal shares both are 1 up to 1/B.
 *
 * Source  Bell & McCaffrey, Bias reduction in standard errors for linear regression with multi-stage samples, Survey
 *         Methodology 28 (2002) 169; Imbens & Kolesár, Robust standard errors in small samples, Rev. Econ. Stat. 98 (2016)
 *         701.
 */

import { studentQuantile } from '../numerics/special/student.js';

const TAIL = 0.975; // the quantile at which the intervals are exact; the ratio changes little around it
const LARGEST_SHARE = 0.95;
const LEAST_FREEDOM = 2; // below, the law of t has no variance and says little more than that nothing is known

/** 1/(1 − H), for shares short of all. */
export function leverageFactor(share: number): number {
  return 1 / (1 - Math.max(0, Math.min(LARGEST_SHARE, share)));
}

/**
 * Degrees of freedom that shares leave, and the ratio of Student's quantiles.
 *
 * @param shares  length B, one per block
 */
export function judgeShares(shares: ArrayLike<number>): { freedom: number; widening: number } {
  let squares = 0;
  for (let block = 0; block < shares.length; block++) squares += shares[block] ** 2;
  const freedom = Math.max(LEAST_FREEDOM, 1 / squares - 1);
  const usual = studentQuantile(TAIL, Math.max(1, shares.length - 1));
  return { freedom, widening: Math.max(1, studentQuantile(TAIL, freedom) / usual) };
}
