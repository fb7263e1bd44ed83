/**
 * What one step tells of the coefficients at its place where axes mix or positions are means over an exposure: Whittle's
 * information of the stationary vector series of displacements, from its spectrum.
 *
 * Second order, with u = ω + 2πm over all m and f the exposure over the interval h:
 *
 *     S(ω) = h Σ_m sinc²(u/2) sinc²(uf/2) (iu/h + Γ)⁻¹ N (−iu/h + Γᵀ)⁻¹ + 2 (1 − cos ω) diag s²
 *
 * First order:  S(ω) = 2Dh (1 − (f/3)(1 − cos ω)) + 2 (1 − cos ω) diag s².  The information about parameters a and b is
 * half the mean over ω of tr(S⁻¹ ∂_a S S⁻¹ ∂_b S).
 *
 * Source  Whittle, J. R. Stat. Soc. B 15 (1953) 125 (vector series); blur at first order: Berglund, Phys. Rev. E 82 (2010)
 *         011917.
 */

import { invertMatrix } from '../../../numerics/linear/smallMatrix.js';
import { factorPositive } from '../../../numerics/linear/factorPositive.js';
import type { LikelihoodLayout } from '../layout.js';
import { type LocalInformation, numberLocal } from '../localInformation.js';
import { createMatrixField, type MatrixField } from '../matrixFields.js';

const FREQUENCIES = 20; // midpoints in the root of ω, dense near zero where spectra of slow friction turn
const FOLDS = 3; // m from −FOLDS to FOLDS; what lies beyond falls off as their fourth power
const STEP = 1e-6; // of a component, for differences

/** @param exposure  fraction of the sampling interval @param samplingInterval  time */
export function createSpectralInformation(
  layout: LikelihoodLayout,
  exposure: number,
  samplingInterval: number,
): LocalInformation {
  const d = layout.dimensions;
  const second = layout.model.order === 'second';
  const numbers = numberLocal(layout);
  const { count } = numbers;
  const friction = layout.friction ? createMatrixField(layout.friction, d) : null;
  const noise = createMatrixField(layout.noise, d);
  const estimatesFriction = friction !== null && friction.slot.basis >= 0;
  const n = 2 * d; // Hermitian d × d as symmetric 2d × 2d
  const spectra = Array.from({ length: count }, () => new Float64Array(n * n));
  const level = new Float64Array(n * n);
  const products = Array.from({ length: count }, () => new Float64Array(n * n));
  const spectrum = second ? createSecondOrderSpectrum(d) : createFirstOrderSpectrum(d);
  const shape = new Float64Array(count * count);
  let shapeOf = '';

  return ({ frictionSums, noiseSums, interval, errorVariances, flow }, steps, out) => {
    const gamma = readMatrix(friction, frictionSums, d);
    const matrix = readMatrix(noise, noiseSums, d);
    const noiseSlopes = slopesOf(noise, noiseSums, d);
    const frictionSlopes = friction && estimatesFriction ? slopesOf(friction, frictionSums, d) : [];
    addForce(out, numbers, matrix, frictionSlopes, interval, second, flow, steps, d);
    // Uniform coefficients have the same spectrum everywhere.
    const key = [...frictionSums, ...noiseSums, interval, ...errorVariances].join();
    if (key !== shapeOf) fillShape(gamma, matrix, frictionSlopes, noiseSlopes, interval, errorVariances);
    shapeOf = key;
    for (let i = 0; i < shape.length; i++) out[i] += steps * shape[i];
  };

  /** The information about friction, noise and localization error, which the spectrum holds. */
  function fillShape(
    gamma: Float64Array,
    matrix: Float64Array,
    frictionSlopes: readonly Float64Array[],
    noiseSlopes: readonly Float64Array[],
    interval: number,
    errorVariances: Float64Array,
  ): void {
    const blur = Math.min(1, (exposure * samplingInterval) / interval);
    const shifted = frictionSlopes.map((slope) => gamma.map((value, i) => value + STEP * slope[i]));
    const noises = [matrix, ...noiseSlopes];
    const targets = [level, ...noiseSlopes.map((_, c) => spectra[numbers.noise + c])];
    shape.fill(0);
    for (let i = 0; i < FREQUENCIES; i++) {
      const root = (i + 0.5) / FREQUENCIES;
      const omega = Math.PI * root * root;
      const weight = (2 * root) / FREQUENCIES; // dω/π
      const rise = 2 * (1 - Math.cos(omega));
      for (const target of targets) target.fill(0);
      spectrum(gamma, noises, interval, blur, omega, targets);
      shifted.forEach((other, c) => {
        const target = spectra[numbers.friction + c];
        target.fill(0);
        spectrum(other, [matrix], interval, blur, omega, [target]);
        for (let e = 0; e < n * n; e++) target[e] = (target[e] - level[e]) / STEP;
      });
      for (let axis = 0; axis < d; axis++) {
        const target = spectra[numbers.error + axis];
        target.fill(0);
        addDiagonal(target, n, d, axis, rise * errorVariances[axis]);
        addDiagonal(level, n, d, axis, rise * errorVariances[axis]);
      }
      const inverse = factorPositive(level, n)?.inverse();
      if (!inverse) continue;
      for (let a = d; a < count; a++) multiplyInto(inverse, spectra[a], products[a], n);
      for (let a = d; a < count; a++) {
        for (let b = a; b < count; b++)
          shape[a * count + b] += (weight * traceOfProduct(products[a], products[b], n)) / 4;
      }
    }
  }
}

/** Adds the spectra of displacements, without localization error, for one friction and several noises. */
type AddSpectra = (
  friction: Float64Array,
  noises: readonly Float64Array[],
  interval: number,
  blur: number,
  omega: number,
  out: readonly Float64Array[],
) => void;

function readMatrix(field: MatrixField | null, sums: Float64Array, d: number): Float64Array {
  const out = new Float64Array(d * d);
  field?.read(sums, out);
  return out;
}

/** Derivatives of the matrix along each of its components; the field has been read. */
function slopesOf(field: MatrixField, sums: Float64Array, d: number): Float64Array[] {
  return Array.from({ length: field.slot.components }, (_, c) => {
    const out = new Float64Array(d * d);
    field.differentiate(
      sums.map((__, i) => (i === c ? 1 : 0)),
      out,
    );
    return out;
  });
}

/** Force among itself, and what friction tells like a force where particles are carried along. */
function addForce(
  out: Float64Array,
  numbers: ReturnType<typeof numberLocal>,
  noise: Float64Array,
  frictionSlopes: readonly Float64Array[],
  interval: number,
  second: boolean,
  flow: Float64Array | null,
  steps: number,
  d: number,
): void {
  const { count } = numbers;
  const weights = invertMatrix(noise, d).map((value) => (steps * interval * value) / (second ? 1 : 2));
  for (let i = 0; i < d; i++) for (let j = i; j < d; j++) out[i * count + j] += weights[i * d + j];
  if (!flow) return;
  const carried = frictionSlopes.map((slope) =>
    Float64Array.from({ length: d }, (_, i) => {
      let sum = 0;
      for (let j = 0; j < d; j++) sum -= slope[i * d + j] * flow[j];
      return sum;
    }),
  );
  carried.forEach((first, a) => {
    const row = numbers.friction + a;
    for (let i = 0; i < d; i++) {
      let weighed = 0;
      for (let j = 0; j < d; j++) weighed += weights[i * d + j] * first[j];
      out[i * count + row] += weighed;
      for (let b = a; b < carried.length; b++)
        out[row * count + numbers.friction + b] += weighed * carried[b][i];
    }
  });
}

function createSecondOrderSpectrum(d: number): AddSpectra {
  const n = 2 * d;
  const square = new Float64Array(d * d);
  const shift = new Float64Array(d * d);
  const work = new Float64Array(d * d);
  const inner = new Float64Array(d * d);
  const left = new Float64Array(d * d);
  return (friction, noises, interval, blur, omega, out) => {
    multiplyInto(friction, friction, square, d);
    const sine = Math.sin(omega / 2) ** 2;
    for (let m = -FOLDS; m <= FOLDS; m++) {
      const u = omega + 2 * Math.PI * m;
      const rate = u / interval;
      for (let i = 0; i < d * d; i++) shift[i] = square[i] + (i % (d + 1) === 0 ? rate * rate : 0);
      const resolvent = invertMatrix(shift, d); // of Γ² + rate²: (iu/h + Γ)⁻¹ = (Γ − iu/h) (Γ² + (u/h)²)⁻¹
      const half = (u * blur) / 2;
      const shutter = Math.abs(half) < 1e-6 ? 1 : (Math.sin(half) / half) ** 2;
      const weight = (interval * sine * shutter) / ((u / 2) * (u / 2));
      noises.forEach((noise, which) => {
        multiplyInto(resolvent, noise, work, d);
        multiplyTransposed(work, resolvent, inner, d);
        multiplyInto(friction, inner, left, d);
        multiplyTransposed(left, friction, work, d);
        const target = out[which];
        for (let i = 0; i < d; i++) {
          for (let j = 0; j < d; j++) {
            const real = weight * (work[i * d + j] + rate * rate * inner[i * d + j]);
            const imaginary = weight * rate * (left[i * d + j] - left[j * d + i]);
            target[i * n + j] += real;
            target[(d + i) * n + d + j] += real;
            target[i * n + d + j] -= imaginary;
            target[(d + i) * n + j] += imaginary;
          }
        }
      });
    }
  };
}

function createFirstOrderSpectrum(d: number): AddSpectra {
  const n = 2 * d;
  return (_friction, noises, interval, blur, omega, out) => {
    const weight = 2 * interval * (1 - (blur / 3) * (1 - Math.cos(omega)));
    noises.forEach((diffusion, which) => {
      for (let i = 0; i < d; i++) {
        for (let j = 0; j < d; j++) {
          out[which][i * n + j] += weight * diffusion[i * d + j];
          out[which][(d + i) * n + d + j] += weight * diffusion[i * d + j];
        }
      }
    });
  };
}

function addDiagonal(out: Float64Array, n: number, d: number, axis: number, value: number): void {
  out[axis * n + axis] += value;
  out[(d + axis) * n + d + axis] += value;
}

function multiplyInto(a: Float64Array, b: Float64Array, out: Float64Array, n: number): void {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      let sum = 0;
      for (let l = 0; l < n; l++) sum += a[i * n + l] * b[l * n + j];
      out[i * n + j] = sum;
    }
  }
}

function traceOfProduct(a: Float64Array, b: Float64Array, n: number): number {
  let sum = 0;
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) sum += a[i * n + j] * b[j * n + i];
  return sum;
}

/** A Bᵀ. */
function multiplyTransposed(a: Float64Array, b: Float64Array, out: Float64Array, n: number): void {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      let sum = 0;
      for (let l = 0; l < n; l++) sum += a[i * n + l] * b[j * n + l];
      out[i * n + j] = sum;
    }
  }
}
