/** Products and triangular solves of matrices in flat arrays, row-major; every inner loop runs along a row. */

/** Inner product of two stretches, four sums at a time. */
export function innerProduct(
  a: Float64Array,
  aFrom: number,
  b: Float64Array,
  bFrom: number,
  length: number,
): number {
  let s0 = 0;
  let s1 = 0;
  let s2 = 0;
  let s3 = 0;
  const whole = length - (length % 4);
  for (let i = 0; i < whole; i += 4) {
    s0 += a[aFrom + i] * b[bFrom + i];
    s1 += a[aFrom + i + 1] * b[bFrom + i + 1];
    s2 += a[aFrom + i + 2] * b[bFrom + i + 2];
    s3 += a[aFrom + i + 3] * b[bFrom + i + 3];
  }
  for (let i = whole; i < length; i++) s0 += a[aFrom + i] * b[bFrom + i];
  return s0 + s1 + (s2 + s3);
}

/** y += factor · x along two stretches. */
export function addMultiple(
  y: Float64Array,
  yFrom: number,
  factor: number,
  x: Float64Array,
  xFrom: number,
  length: number,
): void {
  if (factor === 0) return;
  for (let i = 0; i < length; i++) y[yFrom + i] += factor * x[xFrom + i];
}

/** A B for shapes (rows, inner) and (inner, columns). */
export function multiply(
  a: Float64Array,
  b: Float64Array,
  rows: number,
  inner: number,
  columns: number,
): Float64Array {
  const out = new Float64Array(rows * columns);
  for (let i = 0; i < rows; i++) {
    for (let l = 0; l < inner; l++) addMultiple(out, i * columns, a[i * inner + l], b, l * columns, columns);
  }
  return out;
}

/** Aᵀ for shape (rows, columns). */
export function transpose(a: Float64Array, rows: number, columns: number): Float64Array {
  const out = new Float64Array(a.length);
  for (let i = 0; i < rows; i++) for (let j = 0; j < columns; j++) out[j * rows + i] = a[i * columns + j];
  return out;
}

/** Aᵀ A for shape (rows, columns); symmetric to the last bit. */
export function crossProduct(a: Float64Array, rows: number, columns: number): Float64Array {
  const out = new Float64Array(columns * columns);
  for (let row = 0; row < rows; row++) {
    const from = row * columns;
    for (let i = 0; i < columns; i++) addMultiple(out, i * columns, a[from + i], a, from, i + 1);
  }
  for (let i = 0; i < columns; i++) for (let j = 0; j < i; j++) out[j * columns + i] = out[i * columns + j];
  return out;
}

/** Replaces R by L⁻¹ R, for lower-triangular L of shape (n, n) and R of shape (n, columns). */
export function solveLowerRows(lower: Float64Array, n: number, right: Float64Array, columns: number): void {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++)
      addMultiple(right, i * columns, -lower[i * n + j], right, j * columns, columns);
    const inverse = 1 / lower[i * n + i];
    for (let c = 0; c < columns; c++) right[i * columns + c] *= inverse;
  }
}

/** Replaces R by Lᵀ⁻¹ R, for lower-triangular L of shape (n, n) and R of shape (n, columns). */
export function solveUpperRows(lower: Float64Array, n: number, right: Float64Array, columns: number): void {
  for (let i = n - 1; i >= 0; i--) {
    const inverse = 1 / lower[i * n + i];
    for (let c = 0; c < columns; c++) right[i * columns + c] *= inverse;
    for (let j = 0; j < i; j++)
      addMultiple(right, j * columns, -lower[i * n + j], right, i * columns, columns);
  }
}

/** (L Lᵀ)⁻¹ for lower-triangular L of shape (n, n). */
export function invertFactored(lower: Float64Array, n: number): Float64Array {
  const inverse = new Float64Array(n * n);
  for (let i = 0; i < n; i++) inverse[i * n + i] = 1;
  solveLowerRows(lower, n, inverse, n);
  solveUpperRows(lower, n, inverse, n);
  return inverse;
}

/** Square matrix times vector. */
export function timesVector(matrix: Float64Array, vector: Float64Array): Float64Array {
  const n = vector.length;
  return Float64Array.from({ length: n }, (_, i) => innerProduct(matrix, i * n, vector, 0, n));
}

/** Sum of the diagonal of a matrix of shape (n, n). */
export function trace(matrix: Float64Array, n: number): number {
  let sum = 0;
  for (let i = 0; i < n; i++) sum += matrix[i * n + i];
  return sum;
}
