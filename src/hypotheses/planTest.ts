/** From a hypothesis by name to statements about the coefficients of a fit. */

import type { FitResult } from '../documents/FitDocument.js';
import { UsageError } from '../errors.js';
import type { Model } from '../fields/CoefficientField.js';
import { createConservativeStatement } from './conservativeStatement.js';
import type { PlannedField } from './flexibleEstimate.js';
import { createIsotropyStatement } from './isotropyStatement.js';
import { createLawStatement, type Law } from './lawStatement.js';
import type { ConcentrationReader } from './readConcentration.js';
import { distinctColumnNames, distinctTemperatures, isLogarithmic } from './readColumns.js';
import { differenceSteps } from './readForce.js';
import { resolveLawField } from './resolveLawField.js';
import type { Statement } from './Statement.js';
import { createTemperatureStatement } from './temperatureStatement.js';
import type { HypothesisName } from './TestResult.js';
import { createUniformStatement } from './uniformStatement.js';
import { createZeroForceStatement } from './zeroForceStatement.js';

/** The part of a request that decides what is tested. */
export interface PlannedRequest {
  readonly hypothesis: HypothesisName;
  /** What laws are about, with the hypothesis `law`: friction, noise_xx, diffusion, drift_x, … */
  readonly field?: string;
  /** One law to test, or several to compare. */
  readonly laws?: readonly Law[];
}

export interface TestPlan {
  /** Coefficients that are estimated flexibly. */
  readonly fields: readonly PlannedField[];
  readonly frictionForm?: 'matrix';
  /** What is stated, in words that follow "the statement that". */
  readonly statement: string;
  createStatements(model: Model, nodes: Float64Array, concentration: ConcentrationReader | null): Statement[];
}

/**
 * What a hypothesis asks to be estimated, and the statements it makes: one, or one per law.
 *
 * @throws UsageError  where the hypothesis has no meaning for this fit
 */
export function planTest(fit: FitResult, request: PlannedRequest): TestPlan {
  const { model, visited } = fit;
  const { hypothesis } = request;
  const d = model.dimensions;
  const second = model.order === 'second';
  const steps = differenceSteps(visited.low, visited.high);
  const needsSecond = (what: string): void => {
    if (second) return;
    throw new UsageError(
      `${hypothesis} needs a second-order fit, since ${what} is not identified at first order; fit again with --order second if velocities are resolved`,
      { hypothesis, order: 'first' },
    );
  };
  const forceFields: PlannedField[] = second ? ['force'] : ['force', 'noise'];
  const reading = second
    ? ''
    : ' (at first order: of the drift less the part gradients of diffusion bring about)';
  switch (hypothesis) {
    case 'uniform-friction':
      needsSecond('friction');
      checkPresent(fit, 'friction');
      return {
        fields: ['friction'],
        statement: 'the friction is the same everywhere',
        createStatements: (at) => [createUniformStatement(at, distinctColumnNames(at, 'friction'))],
      };
    case 'uniform-noise':
      return {
        fields: ['noise'],
        statement: `the ${second ? 'noise' : 'diffusion'} is the same everywhere`,
        createStatements: (at) => [
          createUniformStatement(at, distinctColumnNames(at, second ? 'noise' : 'diffusion')),
        ],
      };
    case 'uniform-temperature':
      needsSecond('friction');
      checkPresent(fit, 'friction');
      return {
        fields: ['friction', 'noise'],
        statement: 'noise and friction belong to one temperature: noise = 2 temperature × friction',
        createStatements: (at) => {
          if (at.order === 'first') return [];
          const names = distinctTemperatures(at);
          // On a logarithmic scale one temperature is a uniform column; otherwise it is a ratio.
          return isLogarithmic(at, names)
            ? [createUniformStatement(at, names)]
            : [createTemperatureStatement(at)];
        },
      };
    case 'conservative-force':
      if (d === 1 && model.periods[0] === 0) {
        throw new UsageError(
          'conservative-force says nothing in one open dimension, where every force that depends on place alone has a potential; give --period to the fit if the axis closes on itself',
          { hypothesis },
        );
      }
      return {
        fields: forceFields,
        statement: `the force has a potential${reading}`,
        createStatements: (at, nodes) => [createConservativeStatement(at, nodes, steps, visited)],
      };
    case 'zero-force':
      return {
        fields: forceFields,
        statement: `there is no force${reading}`,
        createStatements: (at, nodes) => [createZeroForceStatement(at, nodes, steps)],
      };
    case 'isotropic-friction':
      needsSecond('friction');
      checkPresent(fit, 'friction');
      if (d === 1) {
        throw new UsageError('isotropic-friction needs at least two dimensions', { hypothesis });
      }
      return {
        fields: ['friction'],
        frictionForm: 'matrix',
        statement: 'the friction is the same along every axis, with none across',
        createStatements: (at, nodes) => (at.order === 'second' ? [createIsotropyStatement(at, nodes)] : []),
      };
    case 'law': {
      const { field, laws = [] } = request;
      if (field === undefined || laws.length === 0) {
        throw new UsageError('the hypothesis law needs --field and at least one --law', { hypothesis });
      }
      const resolved = resolveLawField(model, field);
      for (const planned of resolved.fields) if (planned === 'friction') checkPresent(fit, 'friction');
      return {
        fields: resolved.fields,
        statement: '',
        createStatements: (at, _nodes, concentration) =>
          laws.map((law) => createLawStatement(law, resolved.columns, at, concentration)),
      };
    }
  }
}

/** A coefficient that the study set to zero cannot be tested. */
function checkPresent(fit: FitResult, field: 'friction'): void {
  if (fit.study[field].trim() !== 'zero') return;
  throw new UsageError(`the fit was made with --${field} zero, so there is no ${field} to test; fit again`, {
    field,
  });
}
