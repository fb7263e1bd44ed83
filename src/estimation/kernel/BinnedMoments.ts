/**
 * Moments of a regression whose coefficients vary with place, binned to the knots of a grid.
 *
 * A row at the place p with instruments z, regressors x and responses y (one per target t) stands for
 *
 *   y_t = Σ_b x_b X_bt(q) + error,     E[z_b error] = 0 given p,
 *
 * with X interpolated between knots by weights φ_j(q). Dealing the row to the knots i around p by weights φ_i(p) gives
 *
 *   vector (i, b, t) = Σ φ_i z_b y_t,     matrix (i, b; j, b′) = Σ φ_i z_b x_b′ φ_j.
 *
 * The matrix is sparse: p and q are near each other. Only pairs (i, j) that occur are kept.
 *
 * Source  linear binning: Fan & Marron, Fast implementations of nonparametric curve estimators, J. Comput. Graph. Stat. 3
 *         (1994) 35.
 */

/** Moments of part of the rows. */
export interface MomentSums {
  /** Shape (P, Z, Z). */
  readonly matrix: Float64Array;
  /** Shape (K, Z, T). */
  readonly vector: Float64Array;
}

/** Symbols: `K` knots, `P` pairs of knots, `Z` instruments, `T` targets. */
export interface BinnedMoments {
  readonly size: number;
  readonly instruments: number;
  readonly targets: number;
  /** Length P: knot of the instruments and knot of the regressors. */
  readonly rows: Int32Array;
  readonly columns: Int32Array;
  readonly folds: readonly MomentSums[];
  readonly total: MomentSums;
  /** Shape (K, Z): Σ φ_i z_b² over all rows. */
  readonly gram: Float64Array;
  /** Length K: Σ φ_i, how many rows each knot stands for. */
  readonly counts: Float64Array;
}

/** A place as weights of the knots around it. */
export interface KnotWeights {
  readonly indices: Int32Array;
  readonly values: Float64Array;
  count: number;
}

/** Collects rows; the folds are parts of the data that cross-validation leaves out in turn. */
export class MomentCollector {
  readonly #slots: Int32Array;
  readonly #rows: number[] = [];
  readonly #columns: number[] = [];
  readonly #matrices: Float64Array[];
  readonly #vectors: Float64Array[];
  readonly #gram: Float64Array;
  readonly #counts: Float64Array;

  constructor(
    private readonly size: number,
    private readonly instruments: number,
    private readonly targets: number,
    folds: number,
  ) {
    this.#slots = new Int32Array(size * size).fill(-1);
    const capacity = 8 * size * instruments * instruments;
    this.#matrices = Array.from({ length: folds }, () => new Float64Array(capacity));
    this.#vectors = Array.from({ length: folds }, () => new Float64Array(size * instruments * targets));
    this.#gram = new Float64Array(size * instruments);
    this.#counts = new Float64Array(size);
  }

  /**
   * Adds one row.
   *
   * @param at  weights of the place the instruments belong to
   * @param seen  weights of the place the coefficients act at
   */
  add(
    fold: number,
    at: KnotWeights,
    seen: KnotWeights,
    z: Float64Array,
    x: Float64Array,
    responses: Float64Array,
  ): void {
    const { size, instruments, targets } = this;
    const vector = this.#vectors[fold];
    for (let i = 0; i < at.count; i++) {
      const knot = at.indices[i];
      const weight = at.values[i];
      if (weight === 0) continue;
      this.#counts[knot] += weight;
      for (let b = 0; b < instruments; b++) {
        this.#gram[knot * instruments + b] += weight * z[b] * z[b];
        const base = (knot * instruments + b) * targets;
        for (let t = 0; t < targets; t++) vector[base + t] += weight * z[b] * responses[t];
      }
      for (let j = 0; j < seen.count; j++) {
        const product = weight * seen.values[j];
        if (product === 0) continue;
        let slot = this.#slots[knot * size + seen.indices[j]];
        if (slot < 0) slot = this.#open(knot, seen.indices[j]);
        const matrix = this.#matrices[fold];
        let at_ = slot * instruments * instruments;
        for (let b = 0; b < instruments; b++) {
          for (let c = 0; c < instruments; c++) matrix[at_++] += product * z[b] * x[c];
        }
      }
    }
  }

  #open(row: number, column: number): number {
    const slot = this.#rows.length;
    this.#slots[row * this.size + column] = slot;
    this.#rows.push(row);
    this.#columns.push(column);
    const needed = (slot + 1) * this.instruments ** 2;
    if (needed > this.#matrices[0].length) {
      this.#matrices.forEach((matrix, fold) => {
        const larger = new Float64Array(2 * needed);
        larger.set(matrix);
        this.#matrices[fold] = larger;
      });
    }
    return slot;
  }

  finish(): BinnedMoments {
    const length = this.#rows.length * this.instruments ** 2;
    const folds = this.#matrices.map((matrix, fold) => ({
      matrix: matrix.slice(0, length),
      vector: this.#vectors[fold],
    }));
    return {
      size: this.size,
      instruments: this.instruments,
      targets: this.targets,
      rows: Int32Array.from(this.#rows),
      columns: Int32Array.from(this.#columns),
      folds,
      total: addFolds(folds),
      gram: this.#gram,
      counts: this.#counts,
    };
  }
}

/** The moments of all folds together. */
export function addFolds(folds: readonly MomentSums[]): MomentSums {
  const sum = (arrays: readonly Float64Array[]): Float64Array =>
    arrays[0].map((_, i) => arrays.reduce((total, array) => total + array[i], 0));
  return { matrix: sum(folds.map((fold) => fold.matrix)), vector: sum(folds.map((fold) => fold.vector)) };
}

/**
 * Takes what coefficients explain off moment vectors: out −= matrix · X.
 *
 * @param coefficients  X, shape (K, Z, T)
 * @param from  regressors whose coefficients count; the others are taken as zero
 * @param into  instruments whose moments are wanted; the others are left as they are
 * @param out  shape (K, Z, T)
 */
export function subtractExplained(
  moments: BinnedMoments,
  matrix: Float64Array,
  coefficients: Float64Array,
  from: readonly number[],
  into: readonly number[],
  out: Float64Array,
): void {
  const { rows, columns, instruments, targets } = moments;
  const block = instruments * targets;
  for (const b of into) {
    for (const c of from) {
      for (let pair = 0; pair < rows.length; pair++) {
        const weight = matrix[(pair * instruments + b) * instruments + c];
        const row = rows[pair] * block + b * targets;
        const column = columns[pair] * block + c * targets;
        for (let t = 0; t < targets; t++) out[row + t] -= weight * coefficients[column + t];
      }
    }
  }
}
