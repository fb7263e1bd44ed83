/** The integrator of a scenario. */

import type { Scenario } from '../documents/Scenario.js';
import { createFirstOrderIntegrator } from './firstOrderIntegrator.js';
import type { Integrator } from './Integrator.js';
import { measureLengthScale } from './recommendedStep.js';
import type { ScenarioEvaluator } from './ScenarioEvaluator.js';
import { createSecondOrderIntegrator } from './secondOrderIntegrator.js';
import { readWalls } from './walls.js';

/** The integrator for each order, as scenarios name it. */
export const INTEGRATOR_NAMES = { second: 'splitting', first: 'platen' } as const;

export function createIntegrator(scenario: Scenario, evaluator: ScenarioEvaluator): Integrator {
  const walls = readWalls(scenario);
  return scenario.order === 'second'
    ? createSecondOrderIntegrator(evaluator, walls)
    : createFirstOrderIntegrator(evaluator, walls, scenario.reading, measureLengthScale(scenario));
}
