import type { CoefficientField, Model } from '../../fields/CoefficientField.js';

/** The same model with friction, noise and diffusion that are positive by construction. */
export function withLogLinks(model: Model): Model {
  const positive = (field: CoefficientField): CoefficientField => ({
    ...field,
    link: field.form === 'matrix' ? 'log-matrix' : 'log',
  });
  if (model.order === 'first') return { ...model, diffusion: positive(model.diffusion) };
  return { ...model, friction: positive(model.friction), noise: positive(model.noise) };
}
