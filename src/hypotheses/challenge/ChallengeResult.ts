/** What challenging a model says: plain data, as `challenge --json` prints it. */

import type { Warning } from '../../errors.js';

export const CHECKS = [
  'memory',
  'speed-dependent-friction',
  'gaussian-noise',
  'stationarity',
  'independent-tracks',
  'mislinked-jumps',
] as const;

export type CheckName = (typeof CHECKS)[number];

/** How large a departure is, in a unit of its own. */
export interface Effect {
  /** What is measured, in words, with its unit where it has one. */
  readonly name: string;
  readonly value: number;
  /** Standard error; null where none applies. */
  readonly error: number | null;
}

export interface Check {
  readonly name: CheckName;
  /** What the model assumes here, in words. */
  readonly assumption: string;
  readonly statistic: number;
  /** p-value corrected for the number of checks (Holm). */
  readonly p: number;
  /** p-value of this check alone. */
  readonly pAlone: number;
  /** Whether the assumption stands at the level: p ≥ 1 − confidence. */
  readonly holds: boolean;
  readonly effect: Effect;
  /** What was found, and what to do about it. */
  readonly note: string;
}

export interface ChallengeResult {
  readonly confidence: number;
  readonly checks: readonly Check[];
  /** Checks that say nothing here, each with the reason. */
  readonly skipped: readonly { readonly name: CheckName; readonly reason: string }[];
  /** Whether every assumption stands. */
  readonly holds: boolean;
  readonly warnings: readonly Warning[];
}
