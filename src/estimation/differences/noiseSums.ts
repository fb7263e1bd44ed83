/** Sums of the noise regression: the normal equations block by block, and how they move with force and friction. */

import type { Basis } from '../../fields/Basis.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { MomentBlocks } from '../penalizedMoments.js';
import { fillVelocity, type SecondOrderLayout } from './forceFriction.js';
import { addValues, BasisRow, PairSums, sameBasis } from './pairSums.js';
import type { ResidualProducts } from './residualProducts.js';

/** What the residuals of the regression say of the noise. */
export interface NoiseMoments extends MomentBlocks {
  /** Shape (p₂, p₁): how the total moment vector moves with the parameters of the first regression. */
  readonly sensitivity: Float64Array;
}

/** Part of the sensitivity that stands on the functions of one coefficient of the first regression. */
interface SensitivityPart {
  readonly row: BasisRow;
  readonly sums: PairSums;
  /** Noise component × component of the coefficient. */
  readonly weights: Float64Array;
  readonly offset: number;
  readonly components: number;
  readonly functionCount: number;
}

/** Takes rows block after block. */
export class NoiseSums {
  readonly #tracks: TrackSet;
  readonly #layout: SecondOrderLayout;
  readonly #components: number;
  readonly #row: BasisRow;
  readonly #squares: PairSums;
  readonly #force: SensitivityPart | null;
  readonly #friction: SensitivityPart | null;
  readonly #matrices: Float64Array[];
  readonly #vectors: Float64Array[];
  /** Shape (k, c). */
  readonly #responses: Float64Array;
  readonly #velocity: Float64Array;
  readonly #one = Float64Array.of(1);
  #block = -1;

  /**
   * @param basis  of the noise, with k functions
   * @param components  c noise components
   * @param blocks  how many blocks there are
   */
  constructor(
    tracks: TrackSet,
    layout: SecondOrderLayout,
    private readonly basis: Basis,
    components: number,
    blocks: number,
  ) {
    const k = basis.functionCount;
    const p = components * k;
    this.#tracks = tracks;
    this.#layout = layout;
    this.#components = components;
    this.#row = new BasisRow(basis);
    this.#squares = new PairSums(k, k, 1, true);
    this.#force = this.#createPart(layout.force, 0, layout.dimensions);
    this.#friction = this.#createPart(layout.friction, layout.frictionOffset, layout.frictionComponents);
    this.#matrices = Array.from({ length: blocks }, () => new Float64Array(p * p));
    this.#vectors = Array.from({ length: blocks }, () => new Float64Array(p));
    this.#responses = new Float64Array(p);
    this.#velocity = new Float64Array(tracks.dimensions);
  }

  #createPart(basis: Basis | null, offset: number, components: number): SensitivityPart | null {
    if (basis === null) return null;
    const same = sameBasis(basis, this.basis);
    const weights = new Float64Array(this.#components * components);
    return {
      row: same ? this.#row : new BasisRow(basis),
      sums: new PairSums(this.basis.functionCount, basis.functionCount, weights.length, same),
      weights,
      offset,
      components,
      functionCount: basis.functionCount,
    };
  }

  /** Adds one row, whose responses and slopes are in `products`. */
  add(positions: Float64Array, row: number, block: number, products: ResidualProducts): void {
    if (block !== this.#block) this.#closeBlock(block);
    this.#row.evaluate(positions, row);
    this.#squares.add(this.#row, this.#row, this.#one);
    addValues(this.#responses, this.#row, products.responses);
    fillVelocity(this.#velocity, positions, row, this.#tracks.dimensions, this.#tracks.samplingInterval);
    this.#fillWeights(products.slopes);
    for (const part of [this.#force, this.#friction]) {
      if (part === null) continue;
      if (part.row !== this.#row) part.row.evaluate(positions, row);
      part.sums.add(this.#row, part.row, part.weights);
    }
  }

  /** A fitted force along an axis moves the residuals there by −1, friction by the velocity it acts on. */
  #fillWeights(slopes: Float64Array): void {
    const { dimensions: d, frictionForm } = this.#layout;
    const velocity = this.#velocity;
    if (this.#force) {
      const { weights } = this.#force;
      for (let i = 0; i < weights.length; i++) weights[i] = -slopes[i];
    }
    if (!this.#friction) return;
    const { weights, components } = this.#friction;
    weights.fill(0);
    for (let noise = 0; noise < this.#components; noise++) {
      for (let axis = 0; axis < d; axis++) {
        const slope = slopes[noise * d + axis];
        const at = noise * components;
        if (frictionForm === 'matrix') {
          for (let other = 0; other < d; other++) weights[at + axis * d + other] += slope * velocity[other];
        } else {
          weights[at + (frictionForm === 'axes' ? axis : 0)] += slope * velocity[axis];
        }
      }
    }
  }

  #closeBlock(next: number): void {
    const block = this.#block;
    this.#block = next;
    if (block < 0) return;
    const k = this.basis.functionCount;
    const p = this.#components * k;
    for (let component = 0; component < this.#components; component++) {
      this.#squares.addTo(this.#matrices[block], p, component * k, component * k, 0);
      for (let i = 0; i < k; i++) {
        this.#vectors[block][component * k + i] += this.#responses[i * this.#components + component];
      }
    }
    this.#squares.clear();
    this.#responses.fill(0);
  }

  /** All that was added. */
  moments(): NoiseMoments {
    this.#closeBlock(-1);
    const k = this.basis.functionCount;
    const size = this.#components * k;
    const instrumentGram = new Float64Array(size * size);
    for (const matrix of this.#matrices) {
      for (let i = 0; i < matrix.length; i++) instrumentGram[i] += matrix[i];
    }
    const columns = this.#layout.size;
    const sensitivity = new Float64Array(size * columns);
    for (const part of [this.#force, this.#friction]) {
      if (part === null) continue;
      for (let noise = 0; noise < this.#components; noise++) {
        for (let component = 0; component < part.components; component++) {
          const column = part.offset + component * part.functionCount;
          part.sums.addTo(sensitivity, columns, noise * k, column, noise * part.components + component);
        }
      }
    }
    return { size, matrices: this.#matrices, vectors: this.#vectors, instrumentGram, sensitivity };
  }
}
