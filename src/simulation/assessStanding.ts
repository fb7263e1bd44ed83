/** The standing of a scenario: the conditions one by one, and where none fails how fast its law is approached. */

import type { Scenario, Standing } from '../documents/Scenario.js';
import type { ReportShare } from '../numerics/ReportShare.js';
import { formatUnit } from '../units.js';
import { createIntegrator } from './createIntegrator.js';
import { recommendedStep } from './recommendedStep.js';
import { measureRelaxation, RELAXATION_CONFIDENCE } from './relaxation.js';
import { createScenarioEvaluator } from './ScenarioEvaluator.js';
import { createStartDraw } from './startDraw.js';
import { assessConditions } from './standingConditions.js';

/**
 * Assesses a scenario. The relaxation time is measured by a simulation of its own, of a few million steps at most.
 *
 * @param seed  of that simulation
 * @param onProgress  is told how much of the longest simulation there may be is done
 * @throws UsageError  where a formula cannot be read
 *
 * @example
 * const { conditions, relaxation } = await assessStanding(scenario, 1);
 * console.log(conditions.every(({ verdict }) => verdict === 'holds')); // → true
 * console.log(relaxation?.time); // a time, in the units of the scenario
 */
export async function assessStanding(
  scenario: Scenario,
  seed: number,
  onProgress?: ReportShare,
): Promise<Standing> {
  const conditions = await assessConditions(scenario, { draws: scenario.ensemble?.draws });
  if (conditions.some(({ verdict }) => verdict === 'fails')) return { conditions, relaxation: null };
  const evaluator = await createScenarioEvaluator(scenario);
  const { observation, axes } = scenario;
  const { time, low, high } = measureRelaxation(createIntegrator(scenario, evaluator), {
    seed,
    step: scenario.integration.step ?? recommendedStep(evaluator, scenario).step,
    interval: observation.interval,
    periods: axes.map((axis) => (axis.kind === 'periodic' ? (axis.high ?? 0) - (axis.low ?? 0) : 0)),
    drawStart: createStartDraw(scenario, evaluator),
    onProgress,
  });
  const duration = (observation.frames - 1) * observation.interval;
  const count = (relaxation: number): number =>
    digits(observation.tracks * samplesPerTrack(duration, relaxation));
  const unit = formatUnit('time', scenario.units);
  const shown = `${digits(time ?? low)}${unit === '' ? '' : ` ${unit}`}`;
  return {
    conditions,
    relaxation: {
      time: time === null ? null : digits(time),
      low: digits(low),
      high: high !== null && Number.isFinite(high) ? digits(high) : null,
      samples:
        time === null || high === null || !Number.isFinite(high)
          ? null
          : { value: count(time), low: count(high), high: count(low) },
      confidence: RELAXATION_CONFIDENCE,
      note:
        time === null
          ? `slower than the longest simulation tried could show; at least about ${shown}`
          : `slowest decay, ${shown}, among functions of ${scenario.order === 'second' ? 'position and velocity' : 'position'} in a simulation of this scenario`,
    },
  };
}

/**
 * Effective number of independent samples in a track: what the mean of a function that decays as e^{−t/τ} is worth,
 *
 *   1 / [ (2τ/T) (1 − (τ/T)(1 − e^{−T/τ})) ] ,
 *
 * which is 1 for a short track and T/(2τ) for a long one (Anderson, The Statistical Analysis of Time Series, 1971, § 8.2).
 *
 * @param duration  T, time
 * @param relaxation  τ, time, > 0
 */
export function samplesPerTrack(duration: number, relaxation: number): number {
  const x = duration / relaxation;
  if (x < 1e-3) return 1 + x / 3;
  return 1 / ((2 / x) * (1 + Math.expm1(-x) / x));
}

function digits(value: number): number {
  return Number(value.toPrecision(3));
}
