/** What is declared of an option. */

import type { ParseValue } from './optionValues.js';

export interface OptionSpec {
  /** As typed, with a placeholder where a value follows: `-o, --output <FILE>`. */
  readonly flags: string;
  readonly meaning: string;
  readonly unit?: string;
  /** What holds without the option, in words. */
  readonly default?: string;
  /** What small, large or special values do. */
  readonly extremes?: string;
  /** Words the value may be, or begin with (those that end in a colon), for completion in shells. */
  readonly choices?: readonly string[];
  /** Reads the text; without it the text itself is the value. */
  readonly parse?: ParseValue;
  /** Given more than once, the values add up to a list. */
  readonly repeatable?: boolean;
  /** Key of the study that the option sets, where it sets one. */
  readonly study?: string;
}
