/**
 * One temperature: noise and friction belong together everywhere by one and the same number, N = T (Γ + Γᵀ), which for
 * scalars is N = 2 T Γ (fluctuation–dissipation relation; Kubo, Rep. Prog. Phys. 29 (1966) 255). For estimates that may
 * turn negative, so that a ratio had better not be formed.
 */

import type { Model } from '../fields/CoefficientField.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import { entriesOf } from '../uncertainty/columns.js';
import { distinctColumnNames, readColumns } from './readColumns.js';
import type { Statement } from './Statement.js';
import { imposeTemperature } from './uniformStatement.js';

/** N_ij(q) − T (Γ_ij(q) + Γ_ji(q)) = 0 for every entry that friction or noise keep apart. */
export function createTemperatureStatement(model: Model & { order: 'second' }): Statement {
  const d = model.dimensions;
  const noises = distinctColumnNames(model, 'noise');
  const frictions = distinctColumnNames(model, 'friction');
  const names = [...noises, ...frictions];
  const forms = [model.noise.form, model.friction.form];
  const form = forms.includes('matrix') ? 'matrix' : forms.includes('axes') ? 'axes' : 'scalar';
  const entries = entriesOf(form, d, true).slice(0, form === 'scalar' ? 1 : undefined);
  const columnOf = (coefficient: string, fieldForm: string, i: number, j: number): number => {
    if (fieldForm === 'scalar' && i === j) return names.indexOf(`${coefficient}_xx`);
    return names.indexOf(`${coefficient}_${COORDINATE_NAMES[i]}${COORDINATE_NAMES[j]}`);
  };
  return {
    parameterNames: ['temperature'],
    columnNames: names,
    residualNames: entries.map(([i, j]) => {
      const axes = `${COORDINATE_NAMES[i]}${COORDINATE_NAMES[j]}`;
      return `noise_${axes} - 2*temperature*friction_${axes}`;
    }),
    extraNames: [],
    reportNames: [],
    logarithmic: false,
    columns: (at, places) => readColumns(at, names, places),
    extras: () => [],
    reports: () => [],
    combination: (parameters) => {
      const temperature = parameters[0];
      const out = new Float64Array(entries.length * names.length);
      entries.forEach(([i, j], row) => {
        const noise = columnOf('noise', model.noise.form, i, Math.max(i, j));
        if (noise >= 0) out[row * names.length + noise] += 1;
        for (const [a, b] of [
          [i, j],
          [j, i],
        ]) {
          const friction = columnOf('friction', model.friction.form, a, b);
          if (friction >= 0) out[row * names.length + friction] -= temperature;
        }
      });
      return out;
    },
    target: () => null,
    impose: (at, parameters, nodes) => imposeTemperature(at, parameters[0], nodes),
    starts: (columns) => {
      let noise = 0;
      let friction = 0;
      for (let node = 0; node < columns[0].length; node++) {
        noise += columns[0][node];
        friction += columns[noises.length][node];
      }
      return [Float64Array.of(noise / (2 * friction))];
    },
  };
}
