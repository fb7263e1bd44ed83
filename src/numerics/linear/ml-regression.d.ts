/** The part of ml-regression 6.3.0 in use; the package ships no types of its own. */
declare module 'ml-regression' {
  /** y = intercept + slope x. */
  export class SimpleLinearRegression {
    readonly slope: number;
    readonly intercept: number;
    constructor(x: readonly number[], y: readonly number[]);
  }

  /** Several responses on several explanatory variables; the row of the intercept stands last. */
  export class MultivariateLinearRegression {
    /** Shape (variables + 1, responses). */
    readonly weights: number[][];
    /** Standard errors of the weights, where `statistics` is not false. */
    readonly stdErrors: number[];
    /** Residual standard deviation. */
    readonly stdError: number;
    constructor(
      x: readonly (readonly number[])[],
      y: readonly (readonly number[])[],
      options?: { readonly intercept?: boolean; readonly statistics?: boolean },
    );
  }
}
