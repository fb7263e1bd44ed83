/** What a law is about: from the user's word to columns of the model. */

import { UsageError } from '../errors.js';
import type { Model } from '../fields/CoefficientField.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import type { PlannedField } from './flexibleEstimate.js';
import { distinctColumnNames } from './readColumns.js';

export interface LawField {
  /** Columns that should all follow the law. */
  readonly columns: readonly string[];
  /** Coefficients to estimate flexibly. */
  readonly fields: readonly PlannedField[];
}

/**
 * `friction`, `noise`, `diffusion` and `temperature` mean every diagonal entry; `friction_xy` one entry; `force_x` and
 * `drift_x` one component (in one dimension `force` and `drift` will do).
 *
 * @throws UsageError  where the fit has no such coefficient
 */
export function resolveLawField(model: Model, field: string): LawField {
  const axes = COORDINATE_NAMES.slice(0, model.dimensions);
  const first = model.order === 'first';
  const [coefficient, entry] = field.split('_');
  const known = first ? ['drift', 'diffusion'] : ['force', 'friction', 'noise', 'temperature'];
  if (!known.includes(coefficient)) {
    const why =
      first && ['friction', 'noise', 'force', 'temperature'].includes(coefficient)
        ? `${coefficient} is not identified by itself at first order; put the law on`
        : 'is no coefficient of this fit; use';
    throw new UsageError(`--field ${field}: ${why} ${known.join(', ')}`, { option: '--field', value: field });
  }
  if (coefficient === 'force' || coefficient === 'drift') {
    const axis = entry ?? (axes.length === 1 ? axes[0] : '');
    if (!axes.some((name) => name === axis)) {
      const names = axes.map((name) => `${coefficient}_${name}`).join(', ');
      throw new UsageError(`--field ${field} needs a component: ${names}`, {
        option: '--field',
        value: field,
      });
    }
    return { columns: [`${coefficient}_${axis}`], fields: ['force'] };
  }
  if (coefficient === 'temperature') {
    const diagonal = axes.map((name) => `temperature_${name}${name}`);
    const scalar =
      model.order === 'second' && model.noise.form === 'scalar' && model.friction.form === 'scalar';
    const columns = scalar ? diagonal.slice(0, 1) : diagonal;
    return { columns: pickEntry(columns, field, entry), fields: ['friction', 'noise'] };
  }
  const names = distinctColumnNames(model, coefficient as 'friction' | 'noise' | 'diffusion');
  const columns =
    entry === undefined
      ? names.filter((name) => name[name.length - 1] === name[name.length - 2])
      : pickEntry(names, field, entry);
  return { columns, fields: [coefficient === 'friction' ? 'friction' : 'noise'] };
}

function pickEntry(names: readonly string[], field: string, entry: string | undefined): string[] {
  if (entry === undefined) return [...names];
  if (names.includes(field)) return [field];
  throw new UsageError(`--field ${field} is not an entry this fit keeps apart; use ${names.join(', ')}`, {
    option: '--field',
    value: field,
  });
}
