/** What a page can be made of: a fit, and the results of other commands where they were asked for. */

import type { ResimulationResult } from '../checks/ResimulationResult.js';
import type { FitDocument } from '../documents/FitDocument.js';
import type { Scenario } from '../documents/Scenario.js';

/** A test of a statement about the coefficients, as `test --json` prints it. */
export interface ReportedTest {
  readonly hypothesis: string;
  readonly statistic: number | null;
  readonly p: number | null;
  readonly rejected: boolean;
  readonly parameters: Readonly<
    Record<string, { readonly value: number; readonly low: number; readonly high: number }>
  >;
  readonly note: string;
}

/** A check of the model's own assumptions, as `challenge --json` prints it. */
export interface ReportedChallenge {
  readonly name: string;
  readonly p: number | null;
  readonly holds: boolean;
  readonly note: string;
}

export interface ReportInput {
  readonly fit: FitDocument;
  readonly tests?: readonly ReportedTest[];
  readonly challenges?: readonly ReportedChallenge[];
  readonly resimulation?: ResimulationResult;
  readonly scenario?: Scenario;
}
