/** From what the user gives as a law (a name from the shelf or the study, or a formula) to a law with parameters. */

import type { Study } from '../documents/Study.js';
import { UsageError } from '../errors.js';
import type { FormulaReader } from '../fields/formula.js';
import type { Law } from './lawStatement.js';
import { NAMED_LAWS, writeNamedLaw } from './namedLaws.js';
import { CONCENTRATION } from './readConcentration.js';

export interface LawContext {
  readonly readFormula: FormulaReader;
  readonly coordinates: readonly string[];
  /** Whether the recording has a concentration at every position, which laws may then speak of. */
  readonly hasConcentration?: boolean;
  /** What the law is about, as in --field. */
  readonly field: string;
  /** Laws of the study, by name. */
  readonly laws: Study['laws'];
  readonly start: Readonly<Record<string, number>>;
  readonly fixed: Readonly<Record<string, number>>;
}

/**
 * Reads laws. A name (of the study first, then of the shelf) may carry the coordinate it runs along: `tanh-step:y`.
 *
 * @throws UsageError  for formulas that cannot be read, and for start or held values no law has a parameter for
 *
 * @example
 * const laws = resolveLaws(['g0', 'g0*(1+a*x)'], {
 *   readFormula: await loadFormulaReader(),
 *   coordinates: ['x'],
 *   hasConcentration: false,
 *   field: 'friction',
 *   laws: {},
 *   start: { g0: 1 },
 *   fixed: {},
 * });
 * const request = { hypothesis: 'law', field: 'friction', laws, confidence: 0.95, seed: 1 } as const;
 * console.log(testHypothesis(fit, tracks, request).comparison?.length); // → 2
 */
export function resolveLaws(texts: readonly string[], context: LawContext): Law[] {
  const laws = texts.map((text) => resolveLaw(text.trim(), context));
  for (const [option, values] of [
    ['--start', context.start],
    ['--fix', context.fixed],
  ] as const) {
    for (const name of Object.keys(values)) {
      if (laws.some(({ formula }) => formula.parameters.includes(name))) continue;
      const known = [...new Set(laws.flatMap(({ formula }) => formula.parameters))].join(', ');
      throw new UsageError(
        `${option} names ${name}, which is no parameter of the law${known === '' ? '' : `; its parameters are ${known}`}`,
        { option, value: name },
      );
    }
  }
  return laws;
}

function resolveLaw(text: string, context: LawContext): Law {
  const { coordinates, field, laws, readFormula, start, fixed } = context;
  const [name, axis, ...rest] = text.split(':').map((part) => part.trim());
  const own = Object.hasOwn(laws, name) ? laws[name] : undefined;
  const shelf = own === undefined ? NAMED_LAWS.find((law) => law.name === name) : undefined;
  if (own === undefined && shelf === undefined) return createLaw(text, text, {}, {});
  if (axis !== undefined && (rest.length > 0 || !coordinates.includes(axis))) {
    throw new UsageError(
      `--law "${text}" names the coordinate ${[axis, ...rest].join(':')}; the fit has ${coordinates.join(', ')}`,
      { option: '--law', value: text },
    );
  }
  if (own !== undefined) return createLaw(text, own.formula, own.start, {});
  if (shelf === undefined) throw new TypeError('a law is either on the shelf or it is not');
  const along = axis ?? (shelf.along === 'first' ? coordinates[0] : coordinates[coordinates.length - 1]);
  return createLaw(text, writeNamedLaw(shelf, field.split('_')[0], along), {}, shelf.fixed ?? {});

  function createLaw(
    label: string,
    formulaText: string,
    ownStart: Readonly<Record<string, number>>,
    ownFixed: Readonly<Record<string, number>>,
  ): Law {
    const variables = context.hasConcentration ? [...coordinates, CONCENTRATION] : coordinates;
    const formula = readFormula(formulaText, { coordinates: variables, parameters: 'free' });
    if (formula.parameters.includes(CONCENTRATION)) {
      throw new UsageError(
        `--law "${text}" speaks of the concentration, of which the fit knows nothing; fit again with --columns concentration=NAME`,
        { option: '--law', value: text },
      );
    }
    const pick = (values: Readonly<Record<string, number>>): Record<string, number> =>
      Object.fromEntries(Object.entries(values).filter(([key]) => formula.parameters.includes(key)));
    return {
      name: label,
      formula,
      start: { ...ownStart, ...pick(start) },
      // A value to start from frees a parameter the shelf would hold.
      fixed: { ...withoutKeys(ownFixed, start), ...pick(fixed) },
    };
  }
}

function withoutKeys(
  values: Readonly<Record<string, number>>,
  keys: Readonly<Record<string, number>>,
): Record<string, number> {
  return Object.fromEntries(Object.entries(values).filter(([key]) => !Object.hasOwn(keys, key)));
}
