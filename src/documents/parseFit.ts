/** Reading a fit file. */

import { UsageError } from '../errors.js';
import type { CoefficientField } from '../fields/CoefficientField.js';
import { modelFields } from '../fields/modelParameters.js';
import { checkDocument, type DocumentPlace } from './checkDocument.js';
import { fitSchema, type FitDocument } from './FitDocument.js';

/**
 * A checked fit: every key of the schema, and sizes that agree with each other.
 *
 * @throws UsageError  where the value is not a fit file, or one that was changed by hand and no longer holds together
 */
export function parseFit(value: unknown, place: Omit<DocumentPlace, 'kind'>): FitDocument {
  const fit = checkDocument(fitSchema, value, 'wanderlaw-fit', { ...place, kind: 'fit file' });
  const refuse = (finding: string): never => {
    throw new UsageError(
      `${place.source} is not a whole fit file: ${finding}; write it again with wanderlaw fit`,
      {
        source: place.source,
      },
    );
  };
  const { dimensions } = fit.model;
  if (fit.data.dimensions !== dimensions || fit.data.coordinates.length !== dimensions) {
    refuse('data and model differ in their dimensions');
  }
  let total = 0;
  for (const field of modelFields(fit.model)) {
    const components = countComponents(field, dimensions);
    if (field.coefficients.length !== components) {
      refuse(`${field.name} has ${field.coefficients.length} components where its form has ${components}`);
    }
    for (const component of field.coefficients) total += component.length;
  }
  for (const replicate of fit.uncertainty.replicates) {
    if (replicate.length !== total) {
      refuse(`a replicate has ${replicate.length} coefficients where the model has ${total}`);
    }
  }
  const cells = fit.visited.cells.reduce((product, count) => product * count, 1);
  if (fit.visited.cells.length !== dimensions || fit.visited.counts.length !== cells) {
    refuse('the grid of the visited region does not match its counts');
  }
  return fit;
}

function countComponents(field: CoefficientField, dimensions: number): number {
  if (field.form === 'scalar') return 1;
  if (field.form === 'vector' || field.form === 'axes') return dimensions;
  return field.name === 'friction' ? dimensions ** 2 : (dimensions * (dimensions + 1)) / 2;
}
