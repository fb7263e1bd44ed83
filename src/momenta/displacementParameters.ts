/** The parameters of the closed-form motions: their names, in which order, and how they are read and written. */

import type { DisplacementModel } from './displacementModels.js';

export type ModelKind = DisplacementModel['kind'];

export type ParameterName =
  | 'diffusion'
  | 'errorVariance'
  | 'logVelocityVariance'
  | 'logFriction'
  | 'logStiffness'
  | 'logRelaxation';

/** Parameters of each kind; the last is dropped where the localization error is known. */
export const PARAMETERS: Record<ModelKind, readonly ParameterName[]> = {
  'first-free': ['diffusion', 'errorVariance'],
  'first-trapped': ['diffusion', 'logRelaxation', 'errorVariance'],
  'second-free': ['logVelocityVariance', 'logFriction', 'errorVariance'],
  'second-trapped': ['logVelocityVariance', 'logFriction', 'logStiffness', 'errorVariance'],
};

/** A motion with its localization error. */
export interface ObservedModel {
  readonly model: DisplacementModel;
  /** Localization error variance s², length². */
  readonly errorVariance: number;
}

/** The value of a parameter, NaN where the model has none of that name. */
export function readParameter(name: ParameterName, model: DisplacementModel, errorVariance: number): number {
  switch (name) {
    case 'errorVariance':
      return errorVariance;
    case 'diffusion':
      return 'diffusion' in model ? model.diffusion : NaN;
    case 'logRelaxation':
      return 'relaxation' in model ? Math.log(model.relaxation) : NaN;
    case 'logVelocityVariance':
      return 'velocityVariance' in model ? Math.log(model.velocityVariance) : NaN;
    case 'logFriction':
      return 'friction' in model ? Math.log(model.friction) : NaN;
    case 'logStiffness':
      return 'stiffness' in model ? Math.log(model.stiffness) : NaN;
  }
}

/** The same motion with other values of the named parameters. */
export function withParameters(
  names: readonly ParameterName[],
  point: readonly number[],
  model: DisplacementModel,
  errorVariance: number,
): ObservedModel {
  const changed: Record<string, unknown> = { ...model };
  let variance = errorVariance;
  names.forEach((name, index) => {
    const value = point[index];
    if (name === 'errorVariance') variance = value;
    else if (name === 'diffusion') changed.diffusion = value;
    else if (name === 'logRelaxation') changed.relaxation = Math.exp(value);
    else if (name === 'logVelocityVariance') changed.velocityVariance = Math.exp(value);
    else if (name === 'logFriction') changed.friction = Math.exp(value);
    else changed.stiffness = Math.exp(value);
  });
  return { model: changed as unknown as DisplacementModel, errorVariance: variance };
}
