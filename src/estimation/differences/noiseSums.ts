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

/** Sums of the functions of the noise with those of one basis (often the same), for all that asks for them. */
interface Family {
  readonly basis: Basis;
  readonly row: BasisRow;
  readonly sums: PairSums;
  readonly weights: Float64Array;
}

/** Some of the weights of a family. */
interface Part {
  readonly family: Family;
  readonly first: number;
  readonly weights: Float64Array;
}

/** Takes rows block after block. */
export class NoiseSums {
  readonly #families: readonly Family[];
  readonly #row: BasisRow;
  readonly #squares: Part;
  readonly #force: Part | null;
  readonly #friction: Part | null;
  readonly #matrices: Float64Array[];
  readonly #vectors: Float64Array[];
  readonly #sensitivity: Float64Array;
  /** Shape (k, c). */
  readonly #responses: Float64Array;
  readonly #velocity: Float64Array;
  #block = -1;

  /**
   * @param basis  of the noise, with k functions
   * @param components  c noise components
   * @param blocks  how many blocks there are
   */
  constructor(
    private readonly tracks: TrackSet,
    private readonly layout: SecondOrderLayout,
    private readonly basis: Basis,
    private readonly components: number,
    blocks: number,
  ) {
    const p = components * basis.functionCount;
    const { force, friction, dimensions: d, frictionComponents } = layout;
    [[this.#squares, this.#force, this.#friction], this.#families] = planFamilies(basis, [
      [basis, 1],
      [force, components * d],
      [friction, components * frictionComponents],
    ]) as [[Part, Part | null, Part | null], Family[]];
    this.#row = this.#squares.family.row;
    this.#squares.weights[0] = 1;
    this.#matrices = Array.from({ length: blocks }, () => new Float64Array(p * p));
    this.#vectors = Array.from({ length: blocks }, () => new Float64Array(p));
    this.#sensitivity = new Float64Array(p * layout.size);
    this.#responses = new Float64Array(p);
    this.#velocity = new Float64Array(d);
  }

  /** Adds one row, whose responses and slopes are in `products`. */
  add(positions: Float64Array, row: number, block: number, products: ResidualProducts): void {
    if (block !== this.#block) this.#closeBlock(block);
    fillVelocity(this.#velocity, positions, row, this.tracks.dimensions, this.tracks.samplingInterval);
    this.#fillWeights(products.slopes);
    this.#row.evaluate(positions, row);
    for (const family of this.#families) {
      if (family.row !== this.#row) family.row.evaluate(positions, row);
      family.sums.add(this.#row, family.row, family.weights);
    }
    addValues(this.#responses, this.#row, products.responses);
  }

  /** A fitted force along an axis moves the residuals there by −1, friction by the velocity it acts on. */
  #fillWeights(slopes: Float64Array): void {
    const { dimensions: d, frictionForm, frictionComponents } = this.layout;
    const velocity = this.#velocity;
    if (this.#force) {
      const { weights } = this.#force;
      for (let i = 0; i < weights.length; i++) weights[i] = -slopes[i];
    }
    if (!this.#friction) return;
    const weights = this.#friction.weights.fill(0);
    for (let noise = 0; noise < this.components; noise++) {
      const at = noise * frictionComponents;
      for (let axis = 0; axis < d; axis++) {
        const slope = slopes[noise * d + axis];
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
    const { components, layout } = this;
    const k = this.basis.functionCount;
    const p = components * k;
    for (let noise = 0; noise < components; noise++) {
      const { family, first } = this.#squares;
      family.sums.addTo(this.#matrices[block], p, noise * k, noise * k, first);
      for (let i = 0; i < k; i++) {
        this.#vectors[block][noise * k + i] += this.#responses[i * components + noise];
      }
      this.#dealSensitivity(this.#force, 0, layout.dimensions, noise);
      this.#dealSensitivity(this.#friction, layout.frictionOffset, layout.frictionComponents, noise);
    }
    for (const { sums } of this.#families) sums.clear();
    this.#responses.fill(0);
  }

  #dealSensitivity(part: Part | null, offset: number, count: number, noise: number): void {
    if (part === null) return;
    const { family, first } = part;
    for (let component = 0; component < count; component++) {
      const column = offset + component * family.basis.functionCount;
      const row = noise * this.basis.functionCount;
      family.sums.addTo(this.#sensitivity, this.layout.size, row, column, first + noise * count + component);
    }
  }

  /** All that was added. */
  moments(): NoiseMoments {
    this.#closeBlock(-1);
    const size = this.components * this.basis.functionCount;
    const instrumentGram = new Float64Array(size * size);
    for (const matrix of this.#matrices) {
      for (let i = 0; i < matrix.length; i++) instrumentGram[i] += matrix[i];
    }
    const [matrices, vectors, sensitivity] = [this.#matrices, this.#vectors, this.#sensitivity];
    return { size, matrices, vectors, instrumentGram, sensitivity };
  }
}

/** Puts what stands on the same functions into one family, so that they are looked up once a row. */
function planFamilies(
  left: Basis,
  wanted: readonly (readonly [Basis | null, number])[],
): [(Part | null)[], Family[]] {
  const groups: { basis: Basis; count: number; members: [index: number, first: number][] }[] = [];
  wanted.forEach(([basis, count], index) => {
    if (basis === null) return;
    const found = groups.find((group) => sameBasis(group.basis, basis));
    const group = found ?? { basis, count: 0, members: [] };
    if (found === undefined) groups.push(group);
    group.members.push([index, group.count]);
    group.count += count;
  });
  const parts: (Part | null)[] = wanted.map(() => null);
  const families = groups.map(({ basis, count, members }) => {
    const symmetric = sameBasis(basis, left);
    const sums = new PairSums(left.functionCount, basis.functionCount, count, symmetric);
    const family = { basis, row: new BasisRow(basis), sums, weights: new Float64Array(count) };
    for (const [index, first] of members) {
      const weights = family.weights.subarray(first, first + wanted[index][1]);
      parts[index] = { family, first, weights };
    }
    return family;
  });
  return [parts, families];
}
