/**
 * How coefficient fields enter a binned regression: each component multiplies certain regressors in the equations of
 * certain targets, and components that share an equation have to be estimated together.
 */

/** One coefficient field of the regression. */
export interface LocalField {
  readonly name: 'force' | 'friction' | 'drift' | 'noise' | 'diffusion';
  /** Whether it varies with place; otherwise it is one global average. */
  readonly varies: boolean;
  /** Per component: the (target, instrument) pairs it stands at. */
  readonly components: readonly (readonly (readonly [number, number])[])[];
}

/** Components estimated together, and all other sets of components with the very same equations. */
export interface ComponentGroup {
  /** Sets of m components each. */
  readonly members: readonly (readonly number[])[];
  /** Shape (m, m): numbers b·Z + c of the matrix entries that are summed. */
  readonly channels: readonly (readonly (readonly number[])[])[];
}

/** Force or drift: one component per axis, on the constant regressor. */
export function vectorField(name: 'force' | 'drift', varies: boolean, dimensions: number): LocalField {
  const components = Array.from({ length: dimensions }, (_, axis) => [[axis, 0] as const]);
  return { name, varies, components };
}

/** Friction in one of its forms: components on the velocities, regressors 1 … d. */
export function frictionField(form: string, varies: boolean, dimensions: number): LocalField {
  const axes = Array.from({ length: dimensions }, (_, axis) => axis);
  const own = axes.map((axis) => [axis, axis + 1] as const);
  const components =
    form === 'matrix'
      ? axes.flatMap((row) => axes.map((column) => [[row, column + 1] as const]))
      : form === 'axes'
        ? own.map((entry) => [entry])
        : [own];
  return { name: 'friction', varies, components };
}

/** Noise or diffusion: one component per target, on the constant regressor. */
export function noiseField(name: 'noise' | 'diffusion', varies: boolean, components: number): LocalField {
  return { name, varies, components: Array.from({ length: components }, (_, target) => [[target, 0]]) };
}

/** Instruments (or regressors) that a field stands at, each once. */
export function instrumentsOf(field: LocalField): number[] {
  return [...new Set(field.components.flatMap((terms) => terms.map(([, instrument]) => instrument)))];
}

/** The sets of components that are estimated together. */
export function groupComponents(field: LocalField, instruments: number): ComponentGroup[] {
  const sets: number[][] = [];
  field.components.forEach((terms, component) => {
    const targets = new Set(terms.map(([target]) => target));
    const home = sets.find((set) =>
      set.some((other) => field.components[other].some(([target]) => targets.has(target))),
    );
    if (home) home.push(component);
    else sets.push([component]);
  });
  const groups = new Map<string, { members: number[][]; channels: number[][][] }>();
  for (const set of sets) {
    const channels = set.map((left) =>
      set.map((right) =>
        field.components[left].flatMap(([target, b]) =>
          field.components[right].flatMap(([other, c]) => (other === target ? [b * instruments + c] : [])),
        ),
      ),
    );
    const key = JSON.stringify(channels);
    const group = groups.get(key) ?? { members: [], channels };
    group.members.push(set);
    groups.set(key, group);
  }
  return [...groups.values()];
}

/**
 * Adds a field's values to the coefficients of the regression.
 *
 * @param values  shape (components, K)
 * @param coefficients  shape (K, Z, T)
 */
export function addCoefficients(
  field: LocalField,
  values: Float64Array,
  coefficients: Float64Array,
  instruments: number,
  targets: number,
): void {
  const size = values.length / field.components.length;
  field.components.forEach((terms, component) => {
    for (const [target, instrument] of terms) {
      for (let knot = 0; knot < size; knot++) {
        coefficients[(knot * instruments + instrument) * targets + target] += values[component * size + knot];
      }
    }
  });
}

/**
 * The moments that belong to each component: sums over the places it stands at.
 *
 * @param vector  shape (K, Z, T)
 * @returns shape (components, K)
 */
export function gatherMoments(
  field: LocalField,
  vector: Float64Array,
  instruments: number,
  targets: number,
): Float64Array {
  const size = vector.length / (instruments * targets);
  const out = new Float64Array(field.components.length * size);
  field.components.forEach((terms, component) => {
    for (const [target, instrument] of terms) {
      for (let knot = 0; knot < size; knot++) {
        out[component * size + knot] += vector[(knot * instruments + instrument) * targets + target];
      }
    }
  });
  return out;
}
