/**
 * Sufficient conditions for one stationary law that is approached exponentially fast, one by one: friction with a
 * positive definite symmetric part, bounded and bounded away from zero; noise of full rank and bounded; on open axes a
 * force that leads back from far away; smooth coefficients.
 *
 * Source  Meyn & Tweedie, Markov Chains and Stochastic Stability (1993), ch. 14–16; Pavliotis, Stochastic Processes
 *         and Applications (2014), ch. 4 and 6; for coefficients that are only Lipschitz (held at an edge), Wu, Stoch.
 *         Process. Appl. 91 (2001) 205, from memory.
 */

import type { Scenario } from '../documents/Scenario.js';
import type { Warning } from '../errors.js';
import { measureRange, readBath, shareOfFailingDraws } from './bathRange.js';
import { assessConfinement, type ForceReader } from './confinement.js';
import {
  type Condition,
  describeAwayFromZero,
  describeBounded,
  describeConfinement,
  describePositive,
  describeSmoothness,
} from './describeConditions.js';
import { findSmallest } from './extremes.js';
import { createItoCoefficients } from './firstOrderIntegrator.js';
import { findReach } from './reach.js';
import { measureLengthScale } from './recommendedStep.js';
import { createScenarioEvaluator, type ScenarioEvaluator } from './ScenarioEvaluator.js';

export interface ConditionOptions {
  /** Coefficient draws to look at besides the best coefficients; default none. */
  readonly draws?: readonly (readonly number[])[];
}

const DRAWS = 40; // a share of 5 % is then two draws

/**
 * The standing conditions of a scenario. Extremes are searched for on a grid and from its best nodes, so a spike
 * narrower than a node's distance may be missed; what formulas do beyond the last probed distance cannot be told.
 *
 * @throws UsageError  where a formula cannot be read
 */
export async function assessConditions(
  scenario: Scenario,
  options: ConditionOptions = {},
): Promise<Condition[]> {
  const evaluator = await createScenarioEvaluator(scenario, null, false);
  const reach = findReach(scenario);
  const isSecond = scenario.order === 'second';
  const bath = readBath(evaluator);
  const draws = (options.draws ?? []).slice(0, DRAWS);
  const conditions: Condition[] = [];
  const noiseName = isSecond ? 'noise' : 'diffusion';
  let friction = { least: 0, most: 0, rotation: 0 };
  if (isSecond) {
    const range = measureRange(scenario, 'friction', bath, reach);
    const share = await shareOfFailingDraws(scenario, 'friction', draws, reach);
    conditions.push(
      describePositive(scenario, 'friction', range, share),
      describeBounded(scenario, 'friction', range),
    );
    conditions.push(describeAwayFromZero(scenario, range));
    const rotation = -findSmallest((place) => -bath.rotation(place), reach.box).value;
    friction = { least: range.least.value, most: range.isGrowing ? Infinity : range.most, rotation };
  }
  const noise = measureRange(scenario, noiseName, bath, reach);
  const share = await shareOfFailingDraws(scenario, noiseName, draws, reach);
  conditions.push(
    describePositive(scenario, noiseName, noise, share),
    describeBounded(scenario, noiseName, noise),
  );
  const readForce = createForceReader(scenario, evaluator);
  const confinement = assessConfinement(scenario, readForce, reach.box, isSecond ? friction : null);
  conditions.push(describeConfinement(scenario, confinement), describeSmoothness(scenario));
  return conditions;
}

/** The failing conditions as warnings. */
export function warnOfConditions(conditions: readonly Condition[]): Warning[] {
  const failing = conditions.filter(({ verdict }) => verdict === 'fails');
  // Friction that is not positive is not away from zero either; saying so once is enough.
  const isNotPositive = failing.some(({ name }) => name === 'friction-positive');
  return failing
    .filter(({ name }) => !(isNotPositive && name === 'friction-away-from-zero'))
    .map(({ name, note }) => ({
      code: `${STANDING_CODE}${name}`,
      message: `no stationary law is assured: ${note}`,
    }));
}

/** Codes of warnings about standing conditions begin with this. */
export const STANDING_CODE = 'standing-';

function createForceReader(scenario: Scenario, evaluator: ScenarioEvaluator): ForceReader {
  const { dimensions: d, bathSize, order } = evaluator;
  if (order === 'first') {
    const sigma = new Float64Array(d * d);
    const ito = createItoCoefficients(evaluator, scenario.reading, measureLengthScale(scenario));
    return (place, out) => ito.evaluateInto(place, out, sigma);
  }
  const friction = new Float64Array(bathSize);
  const noise = new Float64Array(bathSize);
  return (place, out) => evaluator.evaluateInto(place, out, friction, noise);
}
