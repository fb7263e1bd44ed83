/** What a test of a hypothesis says: plain data, as `test --json` prints it. */

import type { PlaceRow } from './tabulatePlaces.js';

export const HYPOTHESES = [
  'uniform-friction',
  'uniform-noise',
  'uniform-temperature',
  'conservative-force',
  'zero-force',
  'isotropic-friction',
  'law',
] as const;

export type HypothesisName = (typeof HYPOTHESES)[number];

/** A parameter with its interval; infinite where the data set no bound on a side (null in JSON). */
export interface TestedParameter {
  readonly value: number;
  readonly low: number;
  readonly high: number;
}

/** One level of detail of a test; see `judgeStatement`. */
export interface TestedLevel {
  readonly modes: number;
  readonly f: number;
  readonly degrees: readonly [between: number, within: number];
  readonly p: number;
}

/** One of several laws, compared on data its parameters were not fitted to. */
export interface ComparedLaw {
  readonly law: string;
  readonly formula: string;
  readonly parameters: Readonly<Record<string, TestedParameter>>;
  readonly statistic: number;
  readonly p: number;
  readonly rejected: boolean;
  /** Log predictive density of blocks left out, summed over all of them, up to a constant common to the laws. */
  readonly score: number;
  /** Standard error of the score. */
  readonly scoreError: number;
  /** Score less that of the best law, and the standard error of this difference; 0 for the best. */
  readonly difference: number;
  readonly differenceError: number;
  /** Whether the difference from the best law is within what chance would bring. */
  readonly tie: boolean;
  /** Distance T² from the flexible fit + 2 × parameters (Andrews' criterion of Akaike's kind); smaller is better. */
  readonly criterion: number;
}

/**
 * Where a p-value comes from: theory; theory, for contrasts less their bias in recordings simulated under the statement;
 * or its rank among recordings simulated under the statement.
 */
export type TestMethod = 'theory' | 'corrected' | 'simulation';

export interface TestResult {
  readonly hypothesis: HypothesisName;
  /** What the law is about and the law itself, with the hypothesis `law`. */
  readonly field?: string;
  readonly law?: string;
  readonly formula?: string;
  /** F statistic of the level of detail at which statement and flexible fit differ most. */
  readonly statistic: number;
  readonly degrees: readonly [between: number, within: number];
  readonly p: number;
  /** `theory`: Hotelling's law; `simulation`: recordings simulated under the statement. */
  readonly method: TestMethod;
  readonly confidence: number;
  readonly rejected: boolean;
  readonly parameters: Readonly<Record<string, TestedParameter>>;
  readonly levels: readonly TestedLevel[];
  /** Independent blocks of data behind the covariance. */
  readonly blocks: number;
  readonly note: string;
  /** Where in space the statement fails. */
  readonly places: readonly PlaceRow[];
  /** With several laws: all of them, best first. */
  readonly comparison?: readonly ComparedLaw[];
}
