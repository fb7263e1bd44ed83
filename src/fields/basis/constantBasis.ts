/** One function, 1 everywhere. */

import type { Basis } from '../Basis.js';

export function createConstantBasis(dimensions: number): Basis {
  return {
    spec: { kind: 'constant' },
    dimensions,
    functionCount: 1,
    support: 1,
    evaluateInto(_places, _offset, indices, values) {
      indices[0] = 0;
      values[0] = 1;
      return 1;
    },
    differentiateInto(_places, _offset, _axis, indices, values) {
      indices[0] = 0;
      values[0] = 0;
      return 1;
    },
    roughness: () => null,
  };
}
