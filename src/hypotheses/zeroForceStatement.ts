/** No force: every component of the force (at first order, of the drift less that of diffusion gradients) vanishes. */

import type { Model } from '../fields/CoefficientField.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import { meanOf } from '../numerics/statistics/meanOf.js';
import { imposeVector } from './imposeField.js';
import { createForceReader } from './readForce.js';
import { identity, type Statement } from './Statement.js';

/**
 * @param nodes  shape (m, d): places over which the force is averaged for the report
 * @param steps  length d: for derivatives of the diffusion, length
 */
export function createZeroForceStatement(model: Model, nodes: Float64Array, steps: Float64Array): Statement {
  const d = model.dimensions;
  const names = COORDINATE_NAMES.slice(0, d).map((axis) => `force_${axis}`);
  const read = (at: Model, places: Float64Array): Float64Array[] => {
    const reader = createForceReader(at, steps, false);
    const columns = names.map(() => new Float64Array(places.length / d));
    const force = new Float64Array(d);
    for (let place = 0; place < columns[0].length; place++) {
      reader(places, place * d, force);
      for (let axis = 0; axis < d; axis++) columns[axis][place] = force[axis];
    }
    return columns;
  };
  return {
    parameterNames: [],
    columnNames: names,
    residualNames: names,
    extraNames: [],
    reportNames: names,
    logarithmic: false,
    columns: read,
    extras: () => [],
    reports: (at) => read(at, nodes).map(meanOf),
    combination: () => identity(d),
    target: () => null,
    impose: (at, _parameters, places) => {
      if (at.order === 'second')
        return imposeVector(
          at,
          names.map(() => new Float64Array(places.length / d)),
          places,
        );
      // At first order the part that gradients of diffusion bring about stays.
      const evaluator = createModelEvaluator(at);
      const force = read(at, places);
      const drift = new Float64Array(d);
      for (let place = 0; place < places.length / d; place++) {
        evaluator.forceInto(places, place * d, drift);
        for (let axis = 0; axis < d; axis++) force[axis][place] = drift[axis] - force[axis][place];
      }
      return imposeVector(at, force, places);
    },
    starts: () => [new Float64Array(0)],
  };
}
