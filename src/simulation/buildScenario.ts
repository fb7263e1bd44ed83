/**
 * From a fit to a calibrated scenario: the fitted coefficients with the choices a simulation needs besides them.
 */

import type { FitOfAnyOrigin } from '../documents/FitDocument.js';
import { type Scenario, scenarioSchema } from '../documents/Scenario.js';
import type { Warning } from '../errors.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { randomStream } from '../numerics/random/RandomStream.js';
import { INTEGRATOR_NAMES } from './createIntegrator.js';
import { createBasisEvaluator } from './ScenarioEvaluator.js';
import { recommendedStep } from './recommendedStep.js';

const START_POINTS = 200; // enough that starts look like the recorded occupancy
const ENSEMBLE_DRAWS = 200;

/**
 * Builds the scenario of a fit. Chosen here, and all to be changed in the file:
 *
 *   continuation  where the force points inward at every open edge of the visited box, `confine` with the mean
 *                 restoring stiffness over the box; elsewhere `hold`
 *   start         the recorded positions kept in the fit, or draws from the visited cells
 *   observation   as many tracks and frames as were recorded, with their interval, error, exposure and loss
 *   ensemble      coefficient draws from the fit's uncertainty
 *
 * @example
 * const scenario = buildScenario(fit);
 * console.log(scenario.order, scenario.observation.frames); // → second 150
 */
export function buildScenario(fit: FitOfAnyOrigin): Scenario {
  const { model, data } = fit;
  const d = model.dimensions;
  const warnings: Warning[] = fit.warnings.map(({ code, message }) => ({ code, message }));
  const coefficients =
    model.order === 'second'
      ? { force: model.force, friction: model.friction, noise: model.noise }
      : { drift: model.drift, diffusion: model.diffusion };
  const periods = model.periods;
  const points = collectStartPoints(fit);
  const bare: Scenario = scenarioSchema.parse({
    format: 'wanderlaw-scenario',
    version: 1,
    title: `fitted to ${data.tracks} tracks of ${data.positions} positions`,
    dimensions: d,
    units: data.units,
    mass: data.mass,
    order: model.order,
    reading: 'ito',
    axes: periods.map((period) =>
      period > 0 ? { kind: 'periodic', low: 0, high: period } : { kind: 'open', low: null, high: null },
    ),
    coefficients,
    continuation: chooseContinuation(fit),
    visited: { low: fit.visited.low, high: fit.visited.high },
    start: { kind: 'points', points },
    observation: {
      tracks: data.tracks,
      frames: Math.max(1, Math.round((data.positions + missingFrames(fit)) / data.tracks)),
      interval: data.samplingInterval,
      localizationError: fit.localizationError.map(({ value }) => (value > 0 ? value : 0)),
      exposure: fit.study.exposure,
      lostFrames: missingFrames(fit) / (data.positions + missingFrames(fit)),
    },
    ensemble:
      fit.uncertainty.replicates.length > 0
        ? { draws: fit.uncertainty.replicates.slice(0, ENSEMBLE_DRAWS) }
        : null,
    provenance: {
      program: fit.program ?? null,
      seed: fit.study.seed,
      estimator: fit.study.estimator,
      sources: (fit.sources ?? []).map(({ path, sha256 }) => ({ path, sha256 })),
      fitted: fit.created ?? null,
    },
  });
  const evaluator = createBasisEvaluator(bare);
  const { step } = recommendedStep(evaluator, bare);
  warnings.push(...describeFloors(bare));
  return {
    ...bare,
    integration: { step: Number(step.toPrecision(3)), integrator: INTEGRATOR_NAMES[model.order] },
    warnings,
  };
}

function missingFrames(fit: FitOfAnyOrigin): number {
  const value = fit.survey.missingFrames;
  return typeof value === 'number' && value > 0 ? value : 0;
}

/** Recorded positions kept for pictures, thinned; where they are few, draws from the visited cells. */
function collectStartPoints(fit: FitOfAnyOrigin): number[][] {
  const d = fit.model.dimensions;
  const sampled = fit.trackSample.flatMap((track) => track.points.map((point) => point.slice(1, d + 1)));
  const stride = Math.max(1, Math.ceil(sampled.length / START_POINTS));
  const points = sampled.filter((_, index) => index % stride === 0);
  const { low, high, cells, counts } = fit.visited;
  const total = counts.reduce((sum, count) => sum + count, 0);
  if (points.length >= START_POINTS / 4 || total === 0) {
    return points.length > 0 ? points : [low.map((value, axis) => (value + high[axis]) / 2)];
  }
  const stream = randomStream(fit.study.seed, 'scenario-start');
  return Array.from({ length: START_POINTS }, () => {
    let target = stream.uniform() * total;
    let cell = 0;
    while (cell < counts.length - 1 && target >= counts[cell]) target -= counts[cell++];
    const point = new Array<number>(d).fill(0);
    for (let axis = d - 1; axis >= 0; axis--) {
      const index = cell % cells[axis];
      cell = Math.floor(cell / cells[axis]);
      point[axis] = low[axis] + ((index + stream.uniform()) / cells[axis]) * (high[axis] - low[axis]);
    }
    return point;
  });
}

/** Mean inward force over each open face of the visited box, and the mean restoring stiffness across the box. */
function chooseContinuation(fit: FitOfAnyOrigin): Scenario['continuation'] {
  const { model, visited } = fit;
  const d = model.dimensions;
  const evaluator = createModelEvaluator(model);
  const force = new Float64Array(d);
  const place = new Float64Array(d);
  const stiffness: number[] = [];
  let confining = true;
  model.periods.forEach((period, axis) => {
    if (period > 0) return;
    const faces = [0, 0]; // mean force along the axis at its lower and upper face
    for (let side = 0; side < 2; side++) {
      let weight = 0;
      visitFace(fit, axis, side, place, (count) => {
        evaluator.forceInto(place, 0, force);
        faces[side] += count * force[axis];
        weight += count;
      });
      if (weight > 0) faces[side] /= weight;
    }
    if (!(faces[0] > 0 && faces[1] < 0)) confining = false;
    stiffness.push((faces[0] - faces[1]) / (visited.high[axis] - visited.low[axis]));
  });
  if (!confining || stiffness.length === 0)
    return { kind: 'hold', width: null, towards: {}, stiffness: null };
  return {
    kind: 'confine',
    width: null,
    towards: {},
    stiffness: Number(Math.max(...stiffness).toPrecision(3)),
  };
}

/** Calls back once per visited cell of the grid's outermost layer that has any, placed on the face of the box. */
function visitFace(
  fit: FitOfAnyOrigin,
  axis: number,
  side: number,
  place: Float64Array,
  visit: (count: number) => void,
): void {
  const { low, high, cells, counts } = fit.visited;
  const d = low.length;
  counts.forEach((count, flat) => {
    let rest = flat;
    const index = new Array<number>(d);
    for (let a = d - 1; a >= 0; a--) {
      index[a] = rest % cells[a];
      rest = Math.floor(rest / cells[a]);
    }
    if (index[axis] !== (side === 0 ? 0 : cells[axis] - 1)) return;
    for (let a = 0; a < d; a++) place[a] = low[a] + ((index[a] + 0.5) / cells[a]) * (high[a] - low[a]);
    place[axis] = side === 0 ? low[axis] : high[axis];
    visit(count + 1e-9); // faces nobody visited count equally
  });
}

const FLOOR_PLACES = [200, 400, 1000];

/** Says how much of the visited box has negative friction or noise. */
function describeFloors(scenario: Scenario): Warning[] {
  const evaluator = createBasisEvaluator(scenario);
  const { visited, dimensions: d } = scenario;
  if (visited === null) return [];
  const force = new Float64Array(d);
  const friction = new Float64Array(evaluator.bathSize);
  const noise = new Float64Array(evaluator.bathSize);
  const place = new Float64Array(d);
  const stream = randomStream(1, 'floor-places');
  const count = FLOOR_PLACES[d - 1];
  for (let i = 0; i < count; i++) {
    for (let axis = 0; axis < d; axis++) {
      place[axis] = visited.low[axis] + stream.uniform() * (visited.high[axis] - visited.low[axis]);
    }
    evaluator.evaluateInto(place, force, friction, noise);
  }
  const warnings: Warning[] = [];
  const names = { friction: 'friction', noise: scenario.order === 'second' ? 'noise' : 'diffusion' };
  for (const key of ['friction', 'noise'] as const) {
    if (evaluator.floored[key] === 0) continue;
    const share = Math.ceil((100 * evaluator.floored[key]) / count);
    warnings.push({
      code: `negative-${names[key]}`,
      message: `the fitted ${names[key]} is negative in about ${share} % of the visited box and is simulated as zero there`,
    });
  }
  return warnings;
}
