/** The first-order scenario that a calibrated second-order one becomes where friction is high. */

import { type Scenario, scenarioSchema } from '../documents/Scenario.js';
import { UsageError, type Warning } from '../errors.js';
import type { BasisSpec } from '../fields/Basis.js';
import type { CoefficientField, FieldForm } from '../fields/CoefficientField.js';
import { logarithmMatrix } from '../numerics/linear/smallMatrix.js';
import { quantileSorted } from '../numerics/statistics/quantile.js';
import { isBasisField } from './coefficients.js';
import { INTEGRATOR_NAMES } from './createIntegrator.js';
import { createFirstOrderLimit, type FirstOrderLimit, type LimitOptions } from './firstOrderLimit.js';
import { createProjection, type Projection } from './projectField.js';
import { recommendedStep } from './recommendedStep.js';
import { createBasisEvaluator, type ScenarioEvaluator } from './ScenarioEvaluator.js';

/** What the limit leaves out, as shares of what it keeps, over the places where tracks start. */
export interface NeglectedTerms {
  readonly median: number;
  /** 95 % point. */
  readonly high: number;
  /** Where that is met. */
  readonly place: readonly number[];
}

const LEAST_FRICTION = 0.1; // of the median friction; what lies below is no place for this limit
const LEAST_NOISE = 1e-3; // of the median noise
const FUNCTIONS = [40, 20, 10]; // splines per axis, by dimension: at least as fine as the fit
const PLACES_PER_FUNCTION = 2; // along each axis
const MOST_DRAWS = 100;
const MOST_NUMBERS = 200_000; // of all draws together: a file of some megabytes
const WARN_NEGLECTED = 0.1;

/**
 * Builds the high-friction limit of a second-order scenario made from a fit, with the drift in the Itô reading. Drift
 * and diffusion are written as splines (the diffusion through its logarithm), the ensemble is carried through the
 * limit draw by draw.
 *
 * @throws UsageError  where the scenario is of first order already, or was not made from fitted bases
 */
export function buildFirstOrderScenario(scenario: Scenario): {
  scenario: Scenario;
  neglected: NeglectedTerms;
} {
  const { dimensions: d, visited } = scenario;
  if (scenario.order === 'first') {
    throw new UsageError('the fit is of first order already; leave out --first-order', {
      option: '--first-order',
    });
  }
  const { friction, noise } = scenario.coefficients;
  if (visited === null || !friction || !noise || !isBasisField(friction) || !isBasisField(noise)) {
    throw new UsageError('the first-order limit is taken of scenarios made from a fit; give a fit file', {
      option: '--first-order',
    });
  }
  const evaluator = createBasisEvaluator(scenario);
  const starts = scenario.start.points.map((point) => Float64Array.from(point));
  const options = chooseOptions(scenario, evaluator, starts);
  const limit = createFirstOrderLimit(evaluator, options);
  const form: FieldForm = evaluator.bathForm;
  const isUniform = evaluator.uniformBath;
  const spec = isUniform ? forceBasis(scenario) : splineBasis(scenario);
  const places = gridPlaces(scenario, spec);
  const driftProjection = createProjection(spec, places, d);
  const diffusionSpec: BasisSpec = isUniform ? { kind: 'constant' } : spec;
  const diffusionProjection = isUniform ? createProjection(diffusionSpec, places, d) : driftProjection;
  const project = (of: FirstOrderLimit): Projected =>
    projectLimit(of, places, d, form, driftProjection, diffusionProjection);

  const best = project(limit);
  const fields = {
    drift: { name: 'drift', form: 'vector', link: 'identity', basis: spec, coefficients: best.drift },
    diffusion: {
      name: 'diffusion',
      form,
      link: form === 'matrix' ? 'log-matrix' : 'log',
      basis: diffusionSpec,
      coefficients: best.diffusion,
    },
  } as const satisfies Record<string, CoefficientField>;
  const kept = Math.min(
    MOST_DRAWS,
    Math.floor(MOST_NUMBERS / (best.drift.flat().length + best.diffusion.flat().length)),
  );
  const draws = scenario.ensemble?.draws.slice(0, kept).map((draw) => {
    const drawn = project(createFirstOrderLimit(createBasisEvaluator(scenario, draw), options));
    return [...drawn.drift.flat(), ...drawn.diffusion.flat()].map((value) => Number(value.toPrecision(7)));
  });

  const neglected = measureNeglected(limit, starts);
  const warnings = scenario.warnings.filter(
    ({ code }) => !code.startsWith('negative-') && !code.startsWith('standing-'),
  );
  warnings.push(...describeLimit(scenario, best, neglected));
  const { stiffness } = scenario.continuation;
  const bare: Scenario = scenarioSchema.parse({
    ...scenario,
    title: scenario.title === '' ? 'first-order limit' : `${scenario.title}, first-order limit`,
    order: 'first',
    reading: 'ito',
    coefficients: fields,
    continuation: {
      kind: scenario.continuation.kind,
      width: scenario.continuation.width,
      stiffness: stiffness === null ? null : Number((stiffness / options.medianFriction).toPrecision(3)),
    },
    start: { ...scenario.start, velocities: [] },
    integration: { step: null, integrator: INTEGRATOR_NAMES.first },
    ensemble: draws === undefined ? null : { draws },
    provenance: {
      ...scenario.provenance,
      limit: {
        from: 'second order, high friction, with noise-induced drift',
        neglectedMedian: Number(neglected.median.toPrecision(3)),
        neglectedHigh: Number(neglected.high.toPrecision(3)),
        neglectedHighAt: neglected.place.map((value) => Number(value.toPrecision(4))),
        projectionError: Number(best.missed.toPrecision(2)),
      },
    },
    standing: null,
    warnings,
  });
  const { step } = recommendedStep(createBasisEvaluator(bare), bare);
  return {
    scenario: { ...bare, integration: { ...bare.integration, step: Number(step.toPrecision(3)) } },
    neglected,
  };
}

/** Least friction and noise from their medians where tracks start; the derivatives' step from the visited box. */
function chooseOptions(
  { visited, dimensions }: Scenario,
  evaluator: ScenarioEvaluator,
  starts: readonly Float64Array[],
): LimitOptions & { readonly medianFriction: number } {
  const force = new Float64Array(dimensions);
  const friction = new Float64Array(evaluator.bathSize);
  const noise = new Float64Array(evaluator.bathSize);
  const stride = evaluator.bathForm === 'matrix' ? dimensions + 1 : 1;
  const frictions: number[] = [];
  const noises: number[] = [];
  for (const start of starts) {
    evaluator.evaluateInto(start, force, friction, noise);
    for (let i = 0; i < evaluator.bathSize; i += stride) {
      frictions.push(friction[i]);
      noises.push(noise[i]);
    }
  }
  const median = (values: number[]): number => quantileSorted(Float64Array.from(values).sort(), 0.5);
  const [medianFriction, medianNoise] = [median(frictions), median(noises)];
  if (!(medianFriction > 0 && medianNoise > 0)) {
    throw new UsageError(
      `the first-order limit needs friction and noise above zero, but over half of the starting places the fit has ${medianFriction <= 0 ? 'no friction' : 'no noise'}`,
      { option: '--first-order' },
    );
  }
  const widths = (visited?.low ?? []).map((low, axis) => (visited?.high[axis] ?? low) - low);
  return {
    shift: 1e-4 * Math.min(...widths),
    leastFriction: LEAST_FRICTION * medianFriction,
    leastNoise: LEAST_NOISE * medianNoise,
    medianFriction,
  };
}

/** With uniform friction and noise the drift is made of the force's own functions. */
function forceBasis(scenario: Scenario): BasisSpec {
  const { force } = scenario.coefficients;
  return force && isBasisField(force) ? (force.basis as BasisSpec) : splineBasis(scenario);
}

function splineBasis({ axes, visited, dimensions: d, coefficients }: Scenario): BasisSpec {
  const counts = axes.map((_, axis) => {
    const own = Object.values(coefficients).map((field) =>
      field && isBasisField(field) && field.basis.kind === 'spline' ? field.basis.counts[axis] : 0,
    );
    return Math.max(FUNCTIONS[d - 1], ...own);
  });
  return {
    kind: 'spline',
    counts,
    low: axes.map((axis, a) => (axis.kind === 'open' ? (visited?.low[a] ?? 0) : (axis.low ?? 0))),
    high: axes.map((axis, a) => (axis.kind === 'open' ? (visited?.high[a] ?? 1) : (axis.high ?? 1))),
    periods: axes.map((axis) => (axis.kind === 'periodic' ? (axis.high ?? 0) - (axis.low ?? 0) : 0)),
  };
}

/** A grid over the box, with some places to every function along every axis. */
function gridPlaces({ visited, axes, dimensions: d }: Scenario, spec: BasisSpec): Float64Array {
  const counts = axes.map(
    (_, axis) => PLACES_PER_FUNCTION * (spec.kind === 'spline' ? spec.counts[axis] : FUNCTIONS[d - 1]),
  );
  const total = counts.reduce((product, count) => product * count, 1);
  const places = new Float64Array(total * d);
  for (let index = 0; index < total; index++) {
    let rest = index;
    for (let axis = 0; axis < d; axis++) {
      const { kind } = axes[axis];
      const low = kind === 'open' ? (visited?.low[axis] ?? 0) : (axes[axis].low ?? 0);
      const high = kind === 'open' ? (visited?.high[axis] ?? 1) : (axes[axis].high ?? 1);
      places[index * d + axis] = low + (((rest % counts[axis]) + 0.5) / counts[axis]) * (high - low);
      rest = Math.floor(rest / counts[axis]);
    }
  }
  return places;
}

interface Projected {
  readonly drift: number[][];
  readonly diffusion: number[][];
  /** Share of places whose friction or noise was lifted. */
  readonly lifted: number;
  /** Root mean square of the drift that the functions miss, as a share of its own. */
  readonly missed: number;
}

function projectLimit(
  limit: FirstOrderLimit,
  places: Float64Array,
  d: number,
  form: FieldForm,
  driftProjection: Projection,
  diffusionProjection: Projection,
): Projected {
  const m = places.length / d;
  const place = new Float64Array(d);
  const drift = new Float64Array(d);
  const diffusion = new Float64Array(d * d);
  const drifts = Array.from({ length: d }, () => new Float64Array(m));
  const count = form === 'scalar' ? 1 : form === 'axes' ? d : (d * (d + 1)) / 2;
  const logs = Array.from({ length: count }, () => new Float64Array(m));
  let lifted = 0;
  for (let row = 0; row < m; row++) {
    for (let axis = 0; axis < d; axis++) place[axis] = places[row * d + axis];
    if (limit.evaluateInto(place, drift, diffusion)) lifted++;
    for (let axis = 0; axis < d; axis++) drifts[axis][row] = drift[axis];
    if (form === 'matrix') {
      const logarithm = logarithmMatrix(diffusion, d);
      let next = 0;
      for (let i = 0; i < d; i++) for (let j = i; j < d; j++) logs[next++][row] = logarithm[i * d + j];
    } else {
      for (let i = 0; i < count; i++) logs[i][row] = Math.log(diffusion[i * (d + 1)]);
    }
  }
  const driftRows = drifts.map((values) => driftProjection.project(values));
  let missed = 0;
  let size = 0;
  drifts.forEach((values, axis) => {
    missed += driftProjection.missed(values, driftRows[axis]) ** 2;
    size += values.reduce((sum, value) => sum + value * value, 0) / m;
  });
  return {
    drift: driftRows,
    diffusion: logs.map((values) => diffusionProjection.project(values)),
    lifted: lifted / m,
    missed: size > 0 ? Math.sqrt(missed / size) : 0,
  };
}

function measureNeglected(limit: FirstOrderLimit, starts: readonly Float64Array[]): NeglectedTerms {
  const found = starts
    .map((place) => ({ value: limit.neglectedAt(place), place: [...place] }))
    .sort((a, b) => a.value - b.value);
  const high = found[Math.min(found.length - 1, Math.floor(0.95 * found.length))];
  return { median: found[found.length >> 1].value, high: high.value, place: high.place };
}

function describeLimit(
  scenario: Scenario,
  best: Projected,
  { median, high, place }: NeglectedTerms,
): Warning[] {
  const warnings: Warning[] = [];
  const percent = (share: number): string => `${Number((100 * share).toPrecision(2))} %`;
  const at = place.map((value, axis) => `${'xyz'[axis]} = ${Number(value.toPrecision(3))}`).join(', ');
  if (high > WARN_NEGLECTED) {
    warnings.push({
      code: 'coarse-limit',
      message: `the first-order limit leaves out terms of ${percent(median)} in the median and of ${percent(high)} at ${at}; friction is not high there, and the second-order scenario is the better one`,
    });
  }
  if (best.lifted > 0) {
    warnings.push({
      code: 'lifted-friction',
      message: `in ${percent(best.lifted)} of the visited box friction or noise is next to nothing or negative; there the limit is taken with a tenth of the median friction, a thousandth of the median noise`,
    });
  }
  if (scenario.continuation.kind === 'fade' && Object.keys(scenario.continuation.towards).length > 0) {
    warnings.push({
      code: 'fade-to-mean',
      message: 'the limit fades to means over the box, not to the given constants',
    });
  }
  return warnings;
}
