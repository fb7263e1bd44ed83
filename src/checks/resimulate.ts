/**
 * Re-simulation: the fitted model, simulated as the recording was made, against the recording.
 */

import type { FitResult } from '../documents/FitDocument.js';
import { DataError, UsageError, type Warning } from '../errors.js';
import { modelFields, modelParameters } from '../fields/modelParameters.js';
import { type MapTasks, mapTasksSerially } from '../numerics/MapTasks.js';
import { quantileSorted } from '../numerics/statistics/quantile.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { compareFeatures } from './compareFeatures.js';
import { drawSeries } from './drawSeries.js';
import { describeReplicateTask } from './describeReplicateTask.js';
import type { RefitCoefficient, ResimulationResult, ResimulationTime } from './ResimulationResult.js';
import { createDesign, type Design, simulateDesign } from './simulateDesign.js';
import { type FeatureBlock, type FeatureLayout, findBlock, planFeatures } from './featureLayout.js';
import { measureFeatures } from './measureFeatures.js';
import { collectPassages } from './passages.js';
import { checkRegions, type Region } from './Region.js';

export interface ResimulationOptions {
  /** Simulated recordings; at least 19, so that a p-value can reach 0.05. */
  readonly replicates?: number;
  readonly seed: number;
  readonly mapTasks?: MapTasks;
  /** The fit's own estimator: tracks in, coefficient vector of the model out. Null where it finds none. */
  readonly refit?: (tracks: TrackSet) => Promise<ArrayLike<number> | null>;
  /** Regions whose residence times, and the first-passage times between them, are compared too. */
  readonly regions?: readonly Region[];
  /** How many simulated recordings are refitted. */
  readonly refits?: number;
  readonly onProgress?: (done: number, total: number) => void;
}

const REPLICATES = 99; // p-values in steps of 0.01
const FEWEST_REPLICATES = 19;
const REFITS = 4; // each costs a whole fit; the standard error of the mean is half the scatter of the estimator
const REFIT_SHARE = 20; // a refit takes about as long as this many simulated recordings, by likelihood
const LEVEL = 0.05;

const MAPS: readonly string[] = ['kinetic-temperature', 'velocity-persistence', 'current'];

const TITLES: Readonly<Record<string, string>> = {
  occupancy: 'where the particles are',
  'velocity-distribution': 'displacements from frame to frame',
  'displacement-distribution': 'displacements over longer times',
  'mean-squared-displacement': 'mean squared displacement by lag',
  'velocity-autocorrelation': 'correlation of velocities by lag',
  'kinetic-temperature': 'mean squared velocity by place',
  'velocity-persistence': 'correlation of neighbouring velocities by place',
  current: 'mean velocity by place',
  circulation: 'area swept around the centre per time',
};

/**
 * Simulates a fit at the recorded design and compares statistics it was not fitted to.
 *
 * Every replicate uses its own draw of the coefficients (and of the localization error) from the fit's uncertainty,
 * so that a right model is not refused for the error of its estimate. The verdict rests on the largest deviation over
 * all statistics, with its simulated p-value: a right model is called inconsistent in at most 5 % of studies.
 *
 * @param tracks  the recording the fit was made from
 * @throws UsageError  too few replicates, or regions that do not fit the tracks
 * @throws DataError  tracks of other dimensions than the fit, or none
 * @throws NumericalError  where the fitted model runs off to infinity
 *
 * @example
 * const result = await resimulate(fit, tracks, { seed: 1, replicates: 19, refit: createRefit(fit), refits: 1 });
 * console.log(result.consistent, result.refit.map(({ name }) => name)[0]); // → true force_x[0]
 */
export async function resimulate(
  fit: FitResult,
  tracks: TrackSet,
  options: ResimulationOptions,
): Promise<ResimulationResult> {
  const { replicates = REPLICATES, seed, mapTasks = mapTasksSerially } = options;
  if (!Number.isInteger(replicates) || replicates < FEWEST_REPLICATES) {
    throw new UsageError(
      `--replicates must be a whole number of at least ${FEWEST_REPLICATES} to reach a p-value of ${LEVEL}, got ${replicates}`,
      { option: '--replicates', value: replicates },
    );
  }
  if (tracks.dimensions !== fit.model.dimensions) {
    throw new DataError(
      `the tracks have ${tracks.dimensions} dimensions but the fit has ${fit.model.dimensions}; give the tracks it was made from`,
      { found: tracks.dimensions, needed: fit.model.dimensions },
    );
  }
  if (tracks.times.length === 0)
    throw new DataError('there are no positions to compare with; give the tracks of the fit');

  checkRegions(options.regions ?? [], tracks.dimensions);

  const design = createDesign(fit, tracks);
  const layout = planFeatures(tracks, fit.visited.low, fit.visited.high, options.regions);
  const draws = fit.uncertainty.replicates;
  const inputs = Array.from({ length: replicates }, (_, index) => ({
    index,
    draw: draws.length > 0 ? draws[index % draws.length] : null,
  }));
  const refits = options.refit === undefined ? 0 : Math.min(options.refits ?? REFITS, replicates);
  const total = replicates + REFIT_SHARE * refits;
  const described = await mapTasks(describeReplicateTask, { design, layout, seed }, inputs, (done) =>
    options.onProgress?.(done, total),
  );
  const recorded = measureFeatures(layout, tracks.positions);
  const features = [recorded, ...described.map((replicate) => replicate.features)];
  const blocks = layout.blocks
    .filter((block) => !block.name.startsWith('curve:'))
    .map((block) => ({ ...block, occupancy: findOccupancy(layout, block) }));
  const comparison = compareFeatures(features, blocks);

  const warnings: Warning[] = design.scenario.warnings.filter(({ code }) => code.startsWith('negative-'));
  if (draws.length === 0) {
    warnings.push({
      code: 'no-uncertainty',
      message: 'the fit holds no coefficient draws, so the comparison takes its coefficients for exact',
    });
  }
  const refit =
    options.refit === undefined
      ? []
      : await refitCoefficients(fit, design, seed, refits, options.refit, warnings, (done) =>
          options.onProgress?.(replicates + REFIT_SHARE * done, total),
        );
  const titles = new Map(Object.entries(TITLES));
  for (const { name, title } of layout.passages?.kinds ?? []) titles.set(name, title);
  return {
    replicates,
    seed,
    statistics: comparison.statistics.map((statistic) => ({
      ...statistic,
      title: titles.get(statistic.name) ?? statistic.name,
    })),
    times: summarizeTimes(layout, tracks, features),
    refit,
    p: comparison.p,
    level: LEVEL,
    consistent: comparison.p > LEVEL,
    series: drawSeries(layout, features, tracks),
    warnings,
  };
}

/** Mean residence and first-passage times, from the rates at which they end. */
function summarizeTimes(
  layout: FeatureLayout,
  tracks: TrackSet,
  features: readonly Float64Array[],
): ResimulationTime[] {
  const { passages } = layout;
  if (passages === null) return [];
  const recorded = collectPassages(passages, tracks.positions);
  return passages.kinds.map(({ name }, kind) => {
    const offset = findBlock(layout, name)?.offset ?? 0;
    const rates = Float64Array.from(features.slice(1), (set) => set[offset])
      .filter(Number.isFinite)
      .sort();
    const at = (share: number): number | null => {
      const rate = rates.length > 0 ? quantileSorted(rates, share) : 0;
      return rate > 0 ? 1 / rate : null;
    };
    const { ended, atRisk } = recorded[kind];
    return {
      name,
      recorded: ended > 0 ? atRisk / ended : null,
      events: ended,
      low: at(0.975),
      median: at(0.5),
      high: at(0.025),
    };
  });
}

/** The occupancy that weighs a map's cells. */
function findOccupancy(
  layout: FeatureLayout,
  block: FeatureBlock,
): { offset: number; perPlace: number } | undefined {
  const places = findBlock(layout, 'occupancy');
  if (places === undefined || !MAPS.includes(block.name)) return undefined;
  return { offset: places.offset, perPlace: block.length / places.length };
}

/** Simulates the fitted coefficients themselves and estimates them again from the simulated recordings. */
async function refitCoefficients(
  fit: FitResult,
  design: Design,
  seed: number,
  refits: number,
  refit: NonNullable<ResimulationOptions['refit']>,
  warnings: Warning[],
  onProgress: (done: number) => void,
): Promise<RefitCoefficient[]> {
  const putIn = modelParameters(fit.model);
  const found: ArrayLike<number>[] = [];
  for (let index = 0; index < refits; index++) {
    const positions = simulateDesign(design, null, seed, `refit-${index}`, false);
    const estimate = await refit({ ...design.tracks, positions });
    if (estimate !== null && estimate.length === putIn.length) found.push(estimate);
    onProgress(index + 1);
  }
  if (found.length < refits) {
    warnings.push({
      code: 'refit-failed',
      message: `${refits - found.length} of ${refits} simulated recordings could not be fitted again`,
    });
  }
  const names = nameCoefficients(fit);
  if (found.length === 0) return [];
  return names.map((name, index) => {
    const values = found.map((estimate) => estimate[index]);
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    const square = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
    const standardError = values.length < 2 ? null : Math.sqrt(square / (values.length - 1) / values.length);
    return { name, putIn: putIn[index], refitted: mean, standardError };
  });
}

/** `force_x[0]`, `friction_xx[3]`, …, in model order. */
function nameCoefficients(fit: FitResult): string[] {
  const axes = fit.data.coordinates;
  return modelFields(fit.model).flatMap((field) => {
    const components = nameComponents(field.name === 'friction', field.form, axes);
    return field.coefficients.flatMap((row, component) =>
      row.map((_, index) => `${field.name}_${components[component]}[${index}]`),
    );
  });
}

function nameComponents(isFriction: boolean, form: string, axes: readonly string[]): string[] {
  if (form === 'vector') return [...axes];
  if (form === 'scalar') return [axes[0] + axes[0]];
  if (form === 'axes') return axes.map((axis) => axis + axis);
  return axes.flatMap((a, i) => axes.filter((_, j) => isFriction || j >= i).map((b) => a + b));
}
