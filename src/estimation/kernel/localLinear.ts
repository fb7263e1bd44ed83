/**
 * Local linear regression on binned moments: at each knot x₀ the coefficients are taken as lines a + b·(q − x₀), and the
 * moments of the knots around it, weighted by a normal kernel, are solved for them with the instruments z and
 * z·(g − x₀). The estimate a is linear in the moment vectors; its weights (the equivalent kernel) are worked out once
 * and serve for the estimate, its correction for bias, and the effect of every block of data.
 *
 * Lines are reproduced exactly by linear interpolation between knots, so binning costs them nothing; the edge needs no
 * special care because the line takes up the lopsided window.
 *
 * Source  Fan & Gijbels, Local Polynomial Modelling and Its Applications (1996), ch. 3; with instruments: Cai, Das, Xiong &
 *         Wu, Functional coefficient instrumental variables models, J. Econometrics 133 (2006) 207; linear in the data by
 *         binning: Fan & Marron, J. Comput. Graph. Stat. 3 (1994) 35.
 */

import { invertMatrix } from '../../numerics/linear/smallMatrix.js';
import { KERNEL_REACH } from '../../numerics/smoothing/localPolynomial.js';
import type { BinnedMoments } from './BinnedMoments.js';
import { type KernelGrid, separateKnots, stepsBetween } from './grid.js';
import type { ComponentGroup } from './localFields.js';

/** Row sums of the moment matrix of a group of m components, and their first moments along each axis. */
export interface RowSums {
  readonly components: number;
  /** Shape (K, m, m): Σ_j A_ij. */
  readonly zeroth: Float64Array;
  /** Shape (K, m, m, d): Σ_j A_ij (g_j − g_i), length. */
  readonly first: Float64Array;
}

/** Sums the moment matrix over its columns. */
export function sumRows(
  moments: BinnedMoments,
  matrix: Float64Array,
  group: ComponentGroup,
  grid: KernelGrid,
): RowSums {
  const { rows, columns, instruments } = moments;
  const { dimensions: d, size } = grid;
  const m = group.channels.length;
  const zeroth = new Float64Array(size * m * m);
  const first = new Float64Array(size * m * m * d);
  const step = new Float64Array(d);
  for (let pair = 0; pair < rows.length; pair++) {
    for (let axis = 0; axis < d; axis++) step[axis] = separateKnots(grid, columns[pair], rows[pair], axis);
    const base = pair * instruments * instruments;
    for (let i = 0; i < m; i++) {
      for (let j = 0; j < m; j++) {
        let entry = 0;
        for (const channel of group.channels[i][j]) entry += matrix[base + channel];
        const slot = (rows[pair] * m + i) * m + j;
        zeroth[slot] += entry;
        for (let axis = 0; axis < d; axis++) first[slot * d + axis] += entry * step[axis];
      }
    }
  }
  return { components: m, zeroth, first };
}

/** What is left of row sums without a part of the data. */
export function withoutRows(all: RowSums, part: RowSums): RowSums {
  return {
    components: all.components,
    zeroth: all.zeroth.map((value, i) => value - part.zeroth[i]),
    first: all.first.map((value, i) => value - part.first[i]),
  };
}

/** Keeps slopes that the window does not determine from making the local system singular; relative. */
const RIDGE = 1e-9;

/**
 * The equivalent kernel: estimate (κ, x₀) = Σ weights · moment vector (κ′, i).
 *
 * @param widths  shape (K, d): standard deviation of the normal kernel at each knot along each axis, length
 * @param wanted  the n knots to estimate at
 * @returns shape (m, n, m, K)
 */
export function localLinearWeights(
  sums: RowSums,
  grid: KernelGrid,
  widths: Float64Array,
  wanted: Int32Array,
): Float64Array {
  const { dimensions: d, size } = grid;
  const { components: m, zeroth, first } = sums;
  const q = d + 1;
  const n = m * q;
  const weights = new Float64Array(m * wanted.length * m * size);
  const window = new Window(grid, sums);
  const { bins, kernels, offsets } = window;
  const matrix = new Float64Array(n * n);
  const column = new Float64Array(q);
  for (let place = 0; place < wanted.length; place++) {
    const knot = wanted[place];
    window.moveTo(knot, widths);
    matrix.fill(0);
    for (let i = 0; i < window.count; i++) {
      for (let a = 0; a < m; a++) {
        for (let b = 0; b < m; b++) {
          const slot = (bins[i] * m + a) * m + b;
          column[0] = zeroth[slot];
          for (let axis = 0; axis < d; axis++) {
            column[axis + 1] =
              first[slot * d + axis] / widths[knot * d + axis] + offsets[i * q + axis + 1] * zeroth[slot];
          }
          for (let alpha = 0; alpha < q; alpha++) {
            const weight = kernels[i] * offsets[i * q + alpha];
            const base = (a * q + alpha) * n + b * q;
            for (let beta = 0; beta < q; beta++) matrix[base + beta] += weight * column[beta];
          }
        }
      }
    }
    for (let a = 0; a < m; a++) {
      const own = matrix[a * q * n + a * q];
      for (let alpha = 1; alpha < q; alpha++) matrix[(a * q + alpha) * n + a * q + alpha] += RIDGE * own;
    }
    const inverse = invertMatrix(matrix, n);
    for (let a = 0; a < m; a++) {
      for (let b = 0; b < m; b++) {
        const base = ((a * wanted.length + place) * m + b) * size;
        for (let i = 0; i < window.count; i++) {
          let sum = 0;
          for (let alpha = 0; alpha < q; alpha++)
            sum += inverse[a * q * n + b * q + alpha] * offsets[i * q + alpha];
          weights[base + bins[i]] = kernels[i] * sum;
        }
      }
    }
  }
  return weights;
}

/** The window around one knot: bins within reach, their kernel values and (1, (g − x₀)/h …). */
class Window {
  /** Bins in the window that hold data. */
  count = 0;
  readonly bins: Int32Array;
  readonly kernels: Float64Array;
  /** Shape (count, 1 + d). */
  readonly offsets: Float64Array;
  readonly #occupied: Int32Array;
  readonly #axisKernels: Float64Array[];
  readonly #axisOffsets: Float64Array[];

  constructor(
    private readonly grid: KernelGrid,
    sums: RowSums,
  ) {
    const { size, dimensions, counts } = grid;
    const own = sums.components ** 2;
    this.#occupied = Int32Array.from(
      Array.from({ length: size }, (_, bin) => bin).filter((bin) =>
        sums.zeroth.subarray(bin * own, (bin + 1) * own).some((value) => value !== 0),
      ),
    );
    this.bins = new Int32Array(size);
    this.kernels = new Float64Array(size);
    this.offsets = new Float64Array(size * (dimensions + 1));
    this.#axisKernels = counts.map((count) => new Float64Array(count));
    this.#axisOffsets = counts.map((count) => new Float64Array(count));
  }

  /** @param widths  shape (K, d): standard deviations of the kernel at each knot */
  moveTo(knot: number, widths: Float64Array): void {
    const { grid } = this;
    const { dimensions: d, spacing, counts, places } = grid;
    for (let axis = 0; axis < d; axis++) {
      const scale = spacing[axis] / widths[knot * d + axis];
      for (let i = 0; i < counts[axis]; i++) {
        const u = scale * stepsBetween(grid, i, places[axis][knot], axis);
        this.#axisOffsets[axis][i] = u;
        this.#axisKernels[axis][i] = Math.abs(u) <= KERNEL_REACH + RIDGE ? Math.exp((-u * u) / 2) : 0;
      }
    }
    let count = 0;
    for (const bin of this.#occupied) {
      let kernel = 1;
      for (let axis = 0; axis < d; axis++) kernel *= this.#axisKernels[axis][places[axis][bin]];
      if (kernel === 0) continue;
      this.bins[count] = bin;
      this.kernels[count] = kernel;
      this.offsets[count * (d + 1)] = 1;
      for (let axis = 0; axis < d; axis++)
        this.offsets[count * (d + 1) + axis + 1] = this.#axisOffsets[axis][places[axis][bin]];
      count++;
    }
    this.count = count;
  }
}

/** The weights of one global average: estimate κ = Σ weights · moment vector (κ′, i); shape (m, 1, m, K). */
export function averageWeights(sums: RowSums, size: number): Float64Array {
  const m = sums.components;
  const matrix = new Float64Array(m * m);
  for (let i = 0; i < size; i++) {
    for (let j = 0; j < m * m; j++) matrix[j] += sums.zeroth[i * m * m + j];
  }
  const inverse = invertMatrix(matrix, m);
  const weights = new Float64Array(m * m * size);
  for (let i = 0; i < m * m; i++) weights.fill(inverse[i], i * size, (i + 1) * size);
  return weights;
}

/**
 * Applies weights to the moments of a field.
 *
 * @param weights  shape (m, n, m, K) for n places
 * @param moments  shape (components, K)
 * @returns per member set and component: estimates at the n places, in the order of `group.members`
 */
export function applyWeights(
  group: ComponentGroup,
  weights: Float64Array,
  moments: Float64Array,
  size: number,
): Float64Array[][] {
  const m = group.channels.length;
  const places = weights.length / (m * m * size);
  return group.members.map((members) =>
    members.map((_, a) => {
      const out = new Float64Array(places);
      for (let place = 0; place < places; place++) {
        let sum = 0;
        for (let b = 0; b < m; b++) {
          const base = ((a * places + place) * m + b) * size;
          const from = members[b] * size;
          for (let i = 0; i < size; i++) sum += weights[base + i] * moments[from + i];
        }
        out[place] = sum;
      }
      return out;
    }),
  );
}
