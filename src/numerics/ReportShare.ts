/** Telling how far a computation has come, without knowing who wants to hear it. */

/** Is told the share of the work that is done, from 0 to 1. */
export type ReportShare = (share: number) => void;

/** The part of the work from share `from` to share `to`, told in shares of its own. */
export function partOf(report: ReportShare | undefined, from: number, to: number): ReportShare | undefined {
  if (report === undefined) return undefined;
  return (share) => report(from + (to - from) * share);
}
