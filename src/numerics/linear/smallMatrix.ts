/**
 * Functions of d × d matrices, d ≤ 3, row-major in flat arrays. Results are new arrays unless the name says `Into`.
 *
 * Source  exponential by scaling and squaring, logarithm and square root by Denman–Beavers iteration: Higham, Functions of
 *         Matrices (2008), ch. 6, 10 and 11.
 */

/** Product of two d × d matrices. */
export function multiplyMatrices(left: ArrayLike<number>, right: ArrayLike<number>, d: number): Float64Array {
  const out = new Float64Array(d * d);
  for (let i = 0; i < d; i++) {
    for (let j = 0; j < d; j++) {
      let sum = 0;
      for (let l = 0; l < d; l++) sum += left[i * d + l] * right[l * d + j];
      out[i * d + j] = sum;
    }
  }
  return out;
}

/** The identity. */
export function identityMatrix(d: number): Float64Array {
  const out = new Float64Array(d * d);
  for (let i = 0; i < d; i++) out[i * d + i] = 1;
  return out;
}

/** Inverse by Gauss–Jordan with row exchange; entries are not finite where the matrix is singular. */
export function invertMatrix(matrix: ArrayLike<number>, d: number): Float64Array {
  const work = Float64Array.from(matrix);
  const out = identityMatrix(d);
  for (let column = 0; column < d; column++) {
    let pivot = column;
    for (let row = column + 1; row < d; row++) {
      if (Math.abs(work[row * d + column]) > Math.abs(work[pivot * d + column])) pivot = row;
    }
    swapRows(work, column, pivot, d);
    swapRows(out, column, pivot, d);
    const scale = 1 / work[column * d + column];
    for (let j = 0; j < d; j++) {
      work[column * d + j] *= scale;
      out[column * d + j] *= scale;
    }
    for (let row = 0; row < d; row++) {
      if (row === column) continue;
      const weight = work[row * d + column];
      for (let j = 0; j < d; j++) {
        work[row * d + j] -= weight * work[column * d + j];
        out[row * d + j] -= weight * out[column * d + j];
      }
    }
  }
  return out;
}

/** Matrix exponential, by halving until small, a Taylor series, and squaring back. */
export function exponentiateMatrix(matrix: ArrayLike<number>, d: number): Float64Array {
  const norm = maximumNorm(matrix, d);
  const halvings = Math.max(0, Math.ceil(Math.log2(norm / 0.5)));
  const scaled = Float64Array.from(matrix, (value) => value / 2 ** halvings);
  let sum = identityMatrix(d);
  let term = identityMatrix(d);
  for (let n = 1; n <= 16; n++) {
    term = multiplyMatrices(term, scaled, d).map((value) => value / n); // 0.5^16/16! is below rounding
    sum = sum.map((value, i) => value + term[i]);
  }
  for (let i = 0; i < halvings; i++) sum = multiplyMatrices(sum, sum, d);
  return sum;
}

/**
 * Principal square root by the Denman–Beavers iteration.
 *
 * @returns entries that are not finite where the matrix has no principal root (an eigenvalue on the negative axis)
 */
export function rootMatrix(matrix: ArrayLike<number>, d: number): Float64Array {
  let root: Float64Array = Float64Array.from(matrix);
  let inverse: Float64Array = identityMatrix(d);
  for (let round = 0; round < 40; round++) {
    const rootInverse = invertMatrix(root, d);
    const inverseInverse = invertMatrix(inverse, d);
    const next = root.map((value, i) => (value + inverseInverse[i]) / 2);
    inverse = inverse.map((value, i) => (value + rootInverse[i]) / 2);
    const change = next.reduce((most, value, i) => Math.max(most, Math.abs(value - root[i])), 0);
    root = next;
    if (!(change > 1e-16 * maximumNorm(root, d))) return root;
  }
  const square = multiplyMatrices(root, root, d);
  const error = square.reduce((most, value, i) => Math.max(most, Math.abs(value - matrix[i])), 0);
  return error <= 1e-9 * maximumNorm(matrix, d) ? root : root.fill(NaN);
}

/** Principal logarithm: square roots until close to the identity, then the artanh series of (M − I)(M + I)⁻¹. */
export function logarithmMatrix(matrix: ArrayLike<number>, d: number): Float64Array {
  let near: Float64Array = Float64Array.from(matrix);
  const one = identityMatrix(d);
  let roots = 0;
  const distance = (): number =>
    maximumNorm(
      near.map((value, i) => value - one[i]),
      d,
    );
  while (distance() > 0.25 && roots < 60) {
    near = rootMatrix(near, d);
    roots++;
  }
  const ratio = multiplyMatrices(
    near.map((value, i) => value - one[i]),
    invertMatrix(
      near.map((value, i) => value + one[i]),
      d,
    ),
    d,
  );
  return artanhSeries(ratio, d).map((value) => value * 2 ** (roots + 1));
}

/** Inverse hyperbolic tangent, ½ log((I + M)(I − M)⁻¹); all eigenvalues must lie inside (−1, 1) or off the real axis. */
export function artanhMatrix(matrix: ArrayLike<number>, d: number): Float64Array {
  const entries = Float64Array.from(matrix);
  if (maximumNorm(entries, d) < 0.2) return artanhSeries(entries, d);
  const one = identityMatrix(d);
  const ratio = multiplyMatrices(
    entries.map((value, i) => one[i] + value),
    invertMatrix(
      entries.map((value, i) => one[i] - value),
      d,
    ),
    d,
  );
  return logarithmMatrix(ratio, d).map((value) => value / 2);
}

/** M + M³/3 + M⁵/5 + … for small M. */
function artanhSeries(matrix: Float64Array, d: number): Float64Array {
  const square = multiplyMatrices(matrix, matrix, d);
  let power = matrix;
  let sum = matrix;
  for (let n = 3; n < 40; n += 2) {
    power = multiplyMatrices(power, square, d);
    const weighted = power;
    sum = sum.map((value, i) => value + weighted[i] / n);
  }
  return sum;
}

/**
 * Eigenvalues and eigenvectors of a symmetric matrix by cyclic Jacobi rotations.
 *
 * @param values  length d, overwritten with the eigenvalues in no particular order
 * @param vectors  shape (d, d), overwritten; column j belongs to values[j]
 * @param work  scratch, shape (d, d)
 */
export function symmetricEigenInto(
  matrix: ArrayLike<number>,
  d: number,
  values: Float64Array,
  vectors: Float64Array,
  work: Float64Array,
): void {
  for (let i = 0; i < d * d; i++) {
    work[i] = matrix[i];
    vectors[i] = i % (d + 1) === 0 ? 1 : 0;
  }
  for (let sweep = 0; sweep < 30; sweep++) {
    let off = 0;
    let size = 0;
    for (let i = 0; i < d; i++) {
      for (let j = 0; j < d; j++) {
        size += work[i * d + j] ** 2;
        if (i !== j) off += work[i * d + j] ** 2;
      }
    }
    if (off <= 1e-32 * size) break;
    for (let p = 0; p < d - 1; p++) {
      for (let q = p + 1; q < d; q++) rotate(work, vectors, d, p, q);
    }
  }
  for (let i = 0; i < d; i++) values[i] = work[i * d + i];
}

function rotate(work: Float64Array, vectors: Float64Array, d: number, p: number, q: number): void {
  const off = work[p * d + q];
  if (off === 0) return;
  const theta = (work[q * d + q] - work[p * d + p]) / (2 * off);
  const t = (theta >= 0 ? 1 : -1) / (Math.abs(theta) + Math.sqrt(theta * theta + 1));
  const c = 1 / Math.sqrt(t * t + 1);
  const s = t * c;
  for (let i = 0; i < d; i++) {
    const a = work[i * d + p];
    const b = work[i * d + q];
    work[i * d + p] = c * a - s * b;
    work[i * d + q] = s * a + c * b;
  }
  for (let i = 0; i < d; i++) {
    const a = work[p * d + i];
    const b = work[q * d + i];
    work[p * d + i] = c * a - s * b;
    work[q * d + i] = s * a + c * b;
    const u = vectors[i * d + p];
    const w = vectors[i * d + q];
    vectors[i * d + p] = c * u - s * w;
    vectors[i * d + q] = s * u + c * w;
  }
}

/** Largest row sum of absolute values. */
function maximumNorm(matrix: ArrayLike<number>, d: number): number {
  let most = 0;
  for (let i = 0; i < d; i++) {
    let sum = 0;
    for (let j = 0; j < d; j++) sum += Math.abs(matrix[i * d + j]);
    most = Math.max(most, sum);
  }
  return most;
}

function swapRows(matrix: Float64Array, a: number, b: number, d: number): void {
  if (a === b) return;
  for (let j = 0; j < d; j++) {
    const kept = matrix[a * d + j];
    matrix[a * d + j] = matrix[b * d + j];
    matrix[b * d + j] = kept;
  }
}
