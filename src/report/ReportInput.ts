/** What a page can be made of: a fit, and the results of other commands where they were asked for. */

import type { ResimulationResult } from '../checks/ResimulationResult.js';
import type { FitOfAnyOrigin } from '../documents/FitDocument.js';
import type { Scenario } from '../documents/Scenario.js';

/** A test of a statement about the coefficients, as `test --json` prints it. */
export interface ReportedTest {
  readonly hypothesis: string;
  readonly statistic: number | null;
  readonly p: number | null;
  readonly rejected: boolean;
  readonly parameters: ReportedParameters;
  readonly note: string;
  /** With the hypothesis `law`: what the law is about, and the law. */
  readonly field?: string;
  readonly law?: string;
  /** With several laws: all of them, best first. */
  readonly comparison?: readonly ReportedLaw[];
}

export type ReportedParameters = Readonly<
  Record<string, { readonly value: number; readonly low: number; readonly high: number }>
>;

/** One of several laws, compared on data its parameters were not fitted to. */
export interface ReportedLaw {
  readonly law: string;
  readonly parameters: ReportedParameters;
  readonly p: number | null;
  readonly rejected: boolean;
  /** Score less that of the best law, with its standard error; 0 for the best. */
  readonly difference: number | null;
  readonly differenceError: number | null;
  /** Whether the difference from the best is within what chance would bring. */
  readonly tie: boolean;
}

/** A check of the model's own assumptions, as `challenge --json` prints it. */
export interface ReportedChallenge {
  readonly name: string;
  readonly p: number | null;
  readonly holds: boolean;
  readonly note: string;
}

export interface ReportInput {
  readonly fit: FitOfAnyOrigin;
  readonly tests?: readonly ReportedTest[];
  readonly challenges?: readonly ReportedChallenge[];
  readonly resimulation?: ResimulationResult;
  readonly scenario?: Scenario;
}
