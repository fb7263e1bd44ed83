/** All monomials up to a total degree in coordinates scaled to about −1 … 1, constant first, by rising degree. */

import type { Basis, BasisSpec } from '../Basis.js';

type PolynomialSpec = Extract<BasisSpec, { kind: 'polynomial' }>;

export function createPolynomialBasis(spec: PolynomialSpec, dimensions: number): Basis {
  const { degree, centre, scale } = spec;
  const exponents = listExponents(dimensions, degree);
  const k = exponents.length;
  const powers = new Float64Array(dimensions * (degree + 1));

  const fillPowers = (places: ArrayLike<number>, offset: number): void => {
    for (let axis = 0; axis < dimensions; axis++) {
      const scaled = (places[offset + axis] - centre[axis]) / scale[axis];
      let power = 1;
      for (let e = 0; e <= degree; e++) {
        powers[axis * (degree + 1) + e] = power;
        power *= scaled;
      }
    }
  };

  return {
    spec,
    dimensions,
    functionCount: k,
    support: k,
    evaluateInto(places, offset, indices, values) {
      fillPowers(places, offset);
      for (let i = 0; i < k; i++) {
        let product = 1;
        for (let axis = 0; axis < dimensions; axis++)
          product *= powers[axis * (degree + 1) + exponents[i][axis]];
        indices[i] = i;
        values[i] = product;
      }
      return k;
    },
    differentiateInto(places, offset, along, indices, values) {
      fillPowers(places, offset);
      for (let i = 0; i < k; i++) {
        const own = exponents[i][along];
        let product = own === 0 ? 0 : (own * powers[along * (degree + 1) + own - 1]) / scale[along];
        for (let axis = 0; axis < dimensions; axis++) {
          if (axis !== along) product *= powers[axis * (degree + 1) + exponents[i][axis]];
        }
        indices[i] = i;
        values[i] = product;
      }
      return k;
    },
    roughness: () => (degree < 2 ? null : degreePenalty(exponents)),
  };
}

function listExponents(dimensions: number, degree: number): number[][] {
  const all: number[][] = [];
  const extend = (prefix: number[], left: number): void => {
    if (prefix.length === dimensions) all.push(prefix);
    else for (let e = 0; e <= left; e++) extend([...prefix, e], left - e);
  };
  extend([], degree);
  const total = (exponents: number[]): number => exponents.reduce((sum, e) => sum + e, 0);
  return all.sort((a, b) => total(a) - total(b) || b.findIndex((e, i) => e !== a[i]));
}

/** Degree above one is penalised like a mean squared second derivative: with the fourth power of the degree. */
function degreePenalty(exponents: readonly number[][]): Float64Array {
  const k = exponents.length;
  const penalty = new Float64Array(k * k);
  let trace = 0;
  exponents.forEach((exponent, i) => {
    const total = exponent.reduce((sum, e) => sum + e, 0);
    const weight = total < 2 ? 0 : (total * (total - 1)) ** 2;
    penalty[i * k + i] = weight;
    trace += weight;
  });
  return penalty.map((value) => (value * k) / trace);
}
