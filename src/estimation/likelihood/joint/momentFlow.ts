/**
 * Mean and covariance of a linear system over one step, and the adjoint of both.
 *
 *     ṁ = A m + a,   Ṗ = A P + P Aᵀ + N
 *
 * are summed as power series in the length of the step, term by term for the moments themselves: steps are short enough
 * for some ten terms to be exact to rounding, and the adjoint of the sums is exact for any number of them. A has few
 * entries, so its products cost little.
 *
 * Source  moment equations of linear systems: Jazwinski, Stochastic Processes and Filtering Theory (1970), ch. 4.
 */

const MOST_TERMS = 40;
const SHORT = 0.05;
const MEDIUM = 0.3;
const LONG = 1;

/** A linear system of `size` states whose noise acts on a run of them. */
export interface LinearSystem {
  readonly size: number;
  /** First state that noise drives, and how many there are. */
  readonly driven: number;
  readonly drivenCount: number;
  /** The entries of A, `entryCount` of them; slopes are wanted along the first `wantedCount`. */
  entryCount: number;
  readonly wantedCount: number;
  readonly rows: Int32Array;
  readonly columns: Int32Array;
  readonly entries: Float64Array;
  /** Length size: a. */
  readonly offset: Float64Array;
  /** Shape (drivenCount, drivenCount): N, symmetric. */
  readonly noise: Float64Array;
}

/** Derivatives of the log-likelihood along what a step depends on. */
export interface SystemSlopes {
  /** Per wanted entry of A. */
  readonly entries: Float64Array;
  readonly offset: Float64Array;
  /** Shape (drivenCount, drivenCount), symmetric: dℓ = Σ noise_ij dN_ij. */
  readonly noise: Float64Array;
}

/** Scratch space for systems of up to `size` states. */
export interface MomentFlow {
  /**
   * Moves the moments over a step.
   *
   * @param rate  the largest rate of the system times the length of the step, from which the number of terms follows
   */
  advance(
    system: LinearSystem,
    step: number,
    rate: number,
    mean: Float64Array,
    covariance: Float64Array,
  ): void;
  /**
   * Carries the adjoint back over the step.
   *
   * @param mean  the moments before the step; overwritten
   * @param meanSlope  derivative along the mean after the step; becomes that along the mean before it
   * @param covarianceSlope  likewise, symmetric
   * @param slopes  overwritten; null where not wanted
   */
  retreat(
    system: LinearSystem,
    step: number,
    rate: number,
    mean: Float64Array,
    covariance: Float64Array,
    meanSlope: Float64Array,
    covarianceSlope: Float64Array,
    slopes: SystemSlopes | null,
  ): void;
}

export function createSystem(
  size: number,
  driven: number,
  drivenCount: number,
  wantedCount: number,
): LinearSystem {
  const most = drivenCount * size + 2 * size;
  return {
    size,
    driven,
    drivenCount,
    entryCount: 0,
    wantedCount,
    rows: new Int32Array(most),
    columns: new Int32Array(most),
    entries: new Float64Array(most),
    offset: new Float64Array(size),
    noise: new Float64Array(drivenCount * drivenCount),
  };
}

export function createSlopes(system: LinearSystem): SystemSlopes {
  return {
    entries: new Float64Array(system.wantedCount),
    offset: new Float64Array(system.size),
    noise: new Float64Array(system.noise.length),
  };
}

function countTerms(rate: number): number {
  if (rate < SHORT) return 8;
  if (rate < MEDIUM) return 11;
  return rate < LONG ? 16 : MOST_TERMS;
}

export function createMomentFlow(size: number): MomentFlow {
  const square = size * size;
  const means = new Float64Array((MOST_TERMS + 1) * size);
  const covariances = new Float64Array((MOST_TERMS + 1) * square);
  const carriedMean = new Float64Array(size);
  const carried = new Float64Array(square);
  const product = new Float64Array(square);
  const nextMean = new Float64Array(size);

  /** Writes the terms of both series; the zeroth are in place. */
  function fillTerms(system: LinearSystem, step: number, terms: number): void {
    const { size: n, driven, drivenCount, noise } = system;
    for (let j = 0; j < terms; j++) {
      const weight = step / (j + 1);
      const from = j * n;
      const to = from + n;
      for (let i = 0; i < n; i++) means[to + i] = j === 0 ? weight * system.offset[i] : 0;
      product.fill(0);
      for (let e = 0; e < system.entryCount; e++) {
        const value = system.entries[e] * weight;
        const row = system.rows[e];
        const column = system.columns[e];
        means[to + row] += value * means[from + column];
        const source = j * n * n + column * n;
        for (let c = 0; c < n; c++) product[row * n + c] += value * covariances[source + c];
      }
      const target = (j + 1) * n * n;
      for (let r = 0; r < n; r++)
        for (let c = 0; c < n; c++) covariances[target + r * n + c] = product[r * n + c] + product[c * n + r];
      if (j > 0) continue;
      for (let r = 0; r < drivenCount; r++) {
        for (let c = 0; c < drivenCount; c++)
          covariances[target + (driven + r) * n + driven + c] += weight * noise[r * drivenCount + c];
      }
    }
  }

  function begin(mean: Float64Array, covariance: Float64Array, n: number): void {
    for (let i = 0; i < n; i++) means[i] = mean[i];
    for (let i = 0; i < n * n; i++) covariances[i] = covariance[i];
  }

  return {
    advance(system, step, rate, mean, covariance) {
      const n = system.size;
      const terms = countTerms(rate);
      begin(mean, covariance, n);
      fillTerms(system, step, terms);
      // Smallest terms first.
      mean.fill(0, 0, n);
      covariance.fill(0, 0, n * n);
      for (let j = terms; j >= 0; j--) {
        for (let i = 0; i < n; i++) mean[i] += means[j * n + i];
        for (let i = 0; i < n * n; i++) covariance[i] += covariances[j * n * n + i];
      }
    },
    retreat(system, step, rate, mean, covariance, meanSlope, covarianceSlope, slopes) {
      const { size: n, driven, drivenCount, entryCount, rows, columns, entries } = system;
      const terms = countTerms(rate);
      begin(mean, covariance, n);
      fillTerms(system, step, terms);
      slopes?.entries.fill(0);
      for (let i = 0; i < n; i++) carriedMean[i] = meanSlope[i];
      for (let i = 0; i < n * n; i++) carried[i] = covarianceSlope[i];
      for (let j = terms - 1; j >= 0; j--) {
        const weight = step / (j + 1);
        if (slopes) {
          for (let e = 0; e < system.wantedCount; e++) {
            const row = rows[e] * n;
            const source = j * n * n + columns[e] * n;
            let sum = 0;
            for (let c = 0; c < n; c++) sum += carried[row + c] * covariances[source + c];
            slopes.entries[e] += weight * (carriedMean[rows[e]] * means[j * n + columns[e]] + 2 * sum);
          }
          if (j === 0) {
            for (let i = 0; i < n; i++) slopes.offset[i] = weight * carriedMean[i];
            for (let r = 0; r < drivenCount; r++) {
              for (let c = 0; c < drivenCount; c++)
                slopes.noise[r * drivenCount + c] = weight * carried[(driven + r) * n + driven + c];
            }
          }
        }
        product.fill(0);
        nextMean.fill(0);
        for (let e = 0; e < entryCount; e++) {
          const value = entries[e] * weight;
          const row = rows[e];
          const column = columns[e];
          nextMean[column] += value * carriedMean[row];
          for (let c = 0; c < n; c++) product[column * n + c] += value * carried[row * n + c];
        }
        for (let i = 0; i < n; i++) carriedMean[i] = meanSlope[i] + nextMean[i];
        for (let r = 0; r < n; r++) {
          for (let c = 0; c < n; c++)
            carried[r * n + c] = covarianceSlope[r * n + c] + product[r * n + c] + product[c * n + r];
        }
      }
      for (let i = 0; i < n; i++) meanSlope[i] = carriedMean[i];
      for (let i = 0; i < n * n; i++) covarianceSlope[i] = carried[i];
    },
  };
}
