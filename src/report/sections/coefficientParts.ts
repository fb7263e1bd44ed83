/** Which pictures a model asks for: its quantities, and of each the components that differ. */

import type { FieldForm, Model } from '../../fields/CoefficientField.js';
import type { EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import type { Quantity } from '../../units.js';
import { parseColumnName } from '../format.js';

/** A component: its column, and its name for headings (empty where the quantity has one component only). */
export interface Component {
  readonly column: string;
  readonly label: string;
}

export interface QuantityPart {
  readonly quantity: Quantity;
  /** One arrow per place rather than a colour per component. */
  readonly isVector: boolean;
  readonly components: readonly Component[];
  readonly meaning: string;
}

const MEANINGS: Partial<Record<Quantity, string>> = {
  force: 'Acceleration that a particle at rest would feel (force per mass).',
  friction: 'Rate at which a velocity dies away.',
  noise: 'Rate at which random kicks raise the variance of the velocity.',
  temperature:
    'Kinetic temperature per mass, noise over twice the friction: the variance the velocity would settle at.',
  drift:
    'Mean velocity at each place, in the Itô reading: with a diffusion that varies it contains a part due to that variation.',
  diffusion: 'Half the rate at which random steps raise the variance of the position.',
};

function formOf(model: Model, quantity: Quantity): FieldForm {
  if (model.order === 'first') return quantity === 'diffusion' ? model.diffusion.form : 'vector';
  if (quantity === 'friction') return model.friction.form;
  if (quantity === 'noise') return model.noise.form;
  if (quantity !== 'temperature') return 'vector';
  return model.friction.form === 'scalar' && model.noise.form === 'scalar' ? 'scalar' : 'axes';
}

/** Quantities in the order of the columns; components that are equal by construction appear once. */
export function listQuantities(model: Model, columns: readonly EvaluatedColumn[]): QuantityPart[] {
  const parts = new Map<Quantity, Component[]>();
  for (const { name } of columns) {
    const parsed = parseColumnName(name);
    if (parsed === null) continue;
    const list = parts.get(parsed.quantity) ?? [];
    parts.set(parsed.quantity, list);
    const form = formOf(model, parsed.quantity);
    if (form === 'scalar' && list.length > 0) continue;
    const single = form === 'scalar' || model.dimensions === 1;
    list.push({ column: name, label: single ? '' : parsed.component });
  }
  return [...parts].map(([quantity, components]) => ({
    quantity,
    isVector: quantity === 'force' || quantity === 'drift',
    components,
    meaning: MEANINGS[quantity] ?? '',
  }));
}

/** Heading of a component, e.g. `Friction` or `Force along x`. */
export function nameComponent(part: QuantityPart, component: Component): string {
  const name = part.quantity;
  if (component.label === '') return name;
  return part.isVector ? `${name} along ${component.label}` : `${name} ${component.label}`;
}
