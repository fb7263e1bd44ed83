/**
 * The three kinds of expected failure. Each message is one sentence: what is wrong, where, and what would mend it.
 * The facts behind the sentence travel as fields, so that callers never have to match text.
 */

export type ErrorFacts = Readonly<Record<string, string | number | boolean | readonly (string | number)[]>>;

/** Common ground: an expected failure that carries the exit status its command ends with. */
export class WanderlawError extends Error {
  readonly exitStatus: number;
  readonly facts: ErrorFacts;

  constructor(message: string, exitStatus: number, facts: ErrorFacts = {}) {
    super(message);
    this.name = new.target.name;
    this.exitStatus = exitStatus;
    this.facts = facts;
  }
}

/** The command line, a study, scenario or fit file is wrong, or an output cannot be written (exit status 2). */
export class UsageError extends WanderlawError {
  constructor(message: string, facts: ErrorFacts = {}) {
    super(message, 2, facts);
  }
}

/** The tracks cannot be read, or cannot be used for what was asked (exit status 3). */
export class DataError extends WanderlawError {
  constructor(message: string, facts: ErrorFacts = {}) {
    super(message, 3, facts);
  }
}

/** A computation broke down for a reason the user should hear in words (exit status 1). */
export class NumericalError extends WanderlawError {
  constructor(message: string, facts: ErrorFacts = {}) {
    super(message, 1, facts);
  }
}

/** Advice that never stops a run: counted, printed to stderr, kept in the fit and shown in the report. */
export interface Warning {
  readonly code: string;
  readonly message: string;
}

/** What work gives, or null where its data cannot carry it: for recordings drawn or simulated, one of which may fail. */
export function unlessUnusable<Result>(work: () => Result): Result | null {
  try {
    return work();
  } catch (error) {
    if (error instanceof DataError || error instanceof NumericalError) return null;
    throw error;
  }
}
