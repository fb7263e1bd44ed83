/**
 * Running a scenario: many tracks, each from a random stream of its own, so that the bytes do not depend on how the
 * tracks are split among workers.
 */

import type { Scenario } from '../documents/Scenario.js';
import { UsageError, type Warning } from '../errors.js';
import { type MapTasks, mapTasksSerially, type Task } from '../numerics/MapTasks.js';
import { type RandomStream, randomStream } from '../numerics/random/RandomStream.js';
import { COORDINATE_NAMES, type TrackSet } from '../tracks/TrackSet.js';
import { controlStep, type StepControl } from './controlStep.js';
import { createIntegrator } from './createIntegrator.js';
import { recommendedStep } from './recommendedStep.js';
import { createScenarioEvaluator, type ScenarioEvaluator } from './ScenarioEvaluator.js';
import { createStartDraw, drawStartPlace } from './startDraw.js';
import { assessConditions, STANDING_CODE, warnOfConditions } from './standingConditions.js';
import { createTrackSimulator, type TrackSimulator } from './simulateTrack.js';

export interface SimulationOptions {
  /** Each replaces the scenario's own number. */
  readonly tracks?: number;
  readonly frames?: number;
  readonly interval?: number;
  readonly seed: number;
  /** Draws the coefficients of each track from the scenario's ensemble. */
  readonly ensemble?: boolean;
  /** Halves the time step until no average errs by more than this share, as far as a simulation of its own shows. */
  readonly tolerance?: number;
  readonly mapTasks?: MapTasks;
  readonly onProgress?: (done: number, total: number) => void;
}

export interface SimulationResult {
  readonly tracks: TrackSet;
  readonly warnings: readonly Warning[];
  /** Time step that was used. */
  readonly step: number;
  /** What halving the step showed; null where no tolerance was asked for. */
  readonly stepControl: StepControl | null;
}

interface SharedWork {
  readonly scenario: Scenario;
  readonly seed: number;
  readonly step: number;
  readonly ensemble: boolean;
}

interface TrackRange {
  readonly first: number;
  readonly last: number;
}

interface TrackPiece {
  /** Rows kept of each track. */
  readonly counts: Int32Array;
  readonly times: Float64Array;
  readonly positions: Float64Array;
  readonly floored: { readonly friction: number; readonly noise: number };
}

const ROWS_PER_PIECE = 20_000; // a worker's turn of some ten milliseconds
const WARN_RATIO = 3; // a given step this many times the recommended one is worth a word

/**
 * Simulates a scenario.
 *
 * @throws UsageError  where an option, a formula or the step cannot be used
 * @throws NumericalError  where a position stops being finite
 *
 * @example
 * const { tracks, step } = await simulateScenario(scenario, { seed: 7, tracks: 3, frames: 50 });
 * console.log(countTracks(tracks), countPositions(tracks), step < tracks.samplingInterval); // → 3 150 true
 */
export async function simulateScenario(
  scenario: Scenario,
  options: SimulationOptions,
): Promise<SimulationResult> {
  const { seed, tolerance, mapTasks = mapTasksSerially, ensemble = false } = options;
  const observation = {
    ...scenario.observation,
    tracks: checkCount('--tracks', options.tracks ?? scenario.observation.tracks),
    frames: checkCount('--frames', options.frames ?? scenario.observation.frames),
    interval: options.interval ?? scenario.observation.interval,
  };
  if (!(observation.interval > 0 && Number.isFinite(observation.interval))) {
    throw new UsageError(`--interval is a time and must be above 0, got ${observation.interval}`, {
      option: '--interval',
    });
  }
  if (ensemble && (scenario.ensemble === null || scenario.ensemble.draws.length === 0)) {
    throw new UsageError('the scenario holds no ensemble to draw coefficients from; leave out --ensemble', {
      option: '--ensemble',
    });
  }
  const run: Scenario = { ...scenario, observation, ensemble: ensemble ? scenario.ensemble : null };
  const warnings: Warning[] = scenario.warnings
    .filter(({ code }) => !code.startsWith(STANDING_CODE)) // told anew, for the file may have been changed
    .map(({ code, message }) => ({ code, message }));
  const evaluator = await createScenarioEvaluator(run);
  warnings.push(...warnOfConditions(await assessConditions(run)));
  const chosen = chooseStep(run, evaluator, warnings);
  const stepControl =
    tolerance === undefined
      ? null
      : tryHalving(run, evaluator, chosen, tolerance, seed, warnings, options.onProgress);
  const step = stepControl?.step ?? chosen;

  const perPiece = Math.max(1, Math.floor(ROWS_PER_PIECE / observation.frames));
  const ranges: TrackRange[] = [];
  for (let first = 0; first < observation.tracks; first += perPiece) {
    ranges.push({ first, last: Math.min(first + perPiece, observation.tracks) });
  }
  const shared: SharedWork = { scenario: run, seed, step, ensemble };
  const pieces = await mapTasks(simulateTracksTask, shared, ranges, options.onProgress);
  for (const name of ['friction', 'noise'] as const) {
    const count = pieces.reduce((sum, piece) => sum + piece.floored[name], 0);
    if (count === 0) continue;
    const word = name === 'noise' && run.order === 'first' ? 'diffusion' : name;
    warnings.push({
      code: `negative-${word}`,
      message: `${word} was negative in ${count} steps and taken as zero there; see where the fit leaves it unsupported`,
    });
  }
  return { tracks: joinPieces(run, pieces), warnings, step, stepControl };
}

function checkCount(option: string, value: number): number {
  if (Number.isInteger(value) && value >= 1) return value;
  throw new UsageError(`${option} must be a whole number of at least 1, got ${value}`, { option, value });
}

/** The scenario's step, or the recommended one; refuses a step that cannot be stable. */
export function chooseStep(scenario: Scenario, evaluator: ScenarioEvaluator, warnings: Warning[]): number {
  const advice = recommendedStep(evaluator, scenario);
  evaluator.floored.friction = 0;
  evaluator.floored.noise = 0;
  const { step } = scenario.integration;
  if (step === null) return advice.step;
  const used = Math.min(step, scenario.observation.interval);
  if (used > advice.stable) {
    throw new UsageError(
      `scenario: integration.step: ${step} is unstable, the force allows at most ${Number(advice.stable.toPrecision(3))}; use ${Number(advice.step.toPrecision(2))} or leave it out`,
      { at: 'integration.step', step, stable: advice.stable, recommended: advice.step },
    );
  }
  if (used > WARN_RATIO * advice.step) {
    warnings.push({
      code: 'coarse-step',
      message: `the time step ${step} is ${Number((used / advice.step).toPrecision(2))} times the recommended ${Number(advice.step.toPrecision(2))} (limited by ${advice.reason}); averages may be off by more than a thousandth`,
    });
  }
  return step;
}

/** Step-size control on demand. */
function tryHalving(
  scenario: Scenario,
  evaluator: ScenarioEvaluator,
  step: number,
  tolerance: number,
  seed: number,
  warnings: Warning[],
  onProgress: SimulationOptions['onProgress'],
): StepControl {
  if (!(tolerance > 0 && tolerance < 1)) {
    throw new UsageError(`--tolerance is a share and must be above 0 and below 1, got ${tolerance}`, {
      option: '--tolerance',
      value: tolerance,
    });
  }
  const { interval, frames } = scenario.observation;
  const control = controlStep(createIntegrator(scenario, evaluator), {
    step,
    stable: recommendedStep(evaluator, scenario).stable,
    tolerance,
    seed,
    interval,
    duration: frames * interval,
    drawStart: createStartDraw(scenario, evaluator),
    onProgress: onProgress && ((share) => onProgress(share, 1)),
  });
  if (!control.converged) {
    warnings.push({
      code: 'coarse-step',
      message: `after ${control.halvings} halvings, at the time step ${Number(control.step.toPrecision(3))}, the mean ${control.average} still errs by about ${Number((100 * control.error).toPrecision(2))} % ± ${Number((100 * control.errorDeviation).toPrecision(1))} %; use a larger tolerance`,
    });
  }
  evaluator.floored.friction = 0;
  evaluator.floored.noise = 0;
  return control;
}

/** The worker's part: a range of tracks. */
export const simulateTracksTask: Task<SharedWork, TrackRange, TrackPiece> = {
  name: 'simulate-tracks',
  async run({ scenario, seed, step, ensemble }, { first, last }) {
    const { dimensions: d, observation } = scenario;
    const { frames, interval } = observation;
    const recording = {
      step,
      exposure: observation.exposure * interval,
      warmUp: scenario.start.warmUp,
      localizationError: observation.localizationError,
    };
    const frameTimes = Float64Array.from({ length: frames }, (_, frame) => frame * interval);
    const counts = new Int32Array(last - first);
    const times = new Float64Array((last - first) * frames);
    const positions = new Float64Array((last - first) * frames * d);
    let rows = 0;
    const floored = { friction: 0, noise: 0 };
    const evaluators = new Map<number, { evaluator: ScenarioEvaluator; simulate: TrackSimulator }>();
    const start = new Float64Array(d);
    for (let track = first; track < last; track++) {
      const draws = ensemble ? (scenario.ensemble?.draws ?? []) : [];
      const draw = draws.length > 0 ? randomStream(seed, 'ensemble', track).integer(draws.length) : -1;
      let prepared = evaluators.get(draw);
      if (prepared === undefined) {
        const evaluator = await createScenarioEvaluator(scenario, draw < 0 ? null : draws[draw]);
        prepared = {
          evaluator,
          simulate: createTrackSimulator(createIntegrator(scenario, evaluator), recording),
        };
        evaluators.set(draw, prepared);
      }
      const stream = randomStream(seed, 'simulate', track);
      const velocity = drawStartPlace(scenario, start, stream);
      const whole = positions.subarray(rows * d, (rows + frames) * d);
      prepared.simulate(frameTimes, 0, frames, start, velocity, whole, stream);
      times.set(frameTimes, rows);
      const kept = keepFrames(times.subarray(rows, rows + frames), whole, observation.lostFrames, stream);
      counts[track - first] = kept;
      rows += kept;
    }
    for (const { evaluator } of evaluators.values()) {
      floored.friction += evaluator.floored.friction;
      floored.noise += evaluator.floored.noise;
    }
    return { counts, times: times.slice(0, rows), positions: positions.slice(0, rows * d), floored };
  },
};

/**
 * Moves the frames that are not lost to the front, in place; the first is always kept, so that no track vanishes.
 *
 * @returns how many are kept
 */
function keepFrames(
  times: Float64Array,
  positions: Float64Array,
  lostFrames: number,
  stream: RandomStream,
): number {
  if (lostFrames === 0) return times.length;
  const d = positions.length / times.length;
  let kept = 0;
  for (let frame = 0; frame < times.length; frame++) {
    if (frame > 0 && stream.uniform() < lostFrames) continue;
    times[kept] = times[frame];
    positions.copyWithin(kept * d, frame * d, (frame + 1) * d);
    kept++;
  }
  return kept;
}

function joinPieces(scenario: Scenario, pieces: readonly TrackPiece[]): TrackSet {
  const { dimensions, axes, units, observation } = scenario;
  const rows = pieces.reduce((sum, piece) => sum + piece.times.length, 0);
  const trackOffsets = new Int32Array(observation.tracks + 1);
  const times = new Float64Array(rows);
  const positions = new Float64Array(rows * dimensions);
  let track = 0;
  let row = 0;
  for (const piece of pieces) {
    times.set(piece.times, row);
    positions.set(piece.positions, row * dimensions);
    row += piece.times.length;
    for (let i = 0; i < piece.counts.length; i++, track++)
      trackOffsets[track + 1] = trackOffsets[track] + piece.counts[i];
  }
  return {
    dimensions,
    coordinates: COORDINATE_NAMES.slice(0, dimensions),
    trackNames: Array.from({ length: observation.tracks }, (_, index) => String(index + 1)),
    trackOffsets,
    times,
    positions,
    localizationErrors: null,
    trackTypes: null,
    samplingInterval: observation.interval,
    periods: axes.map(({ kind, low, high }) => (kind === 'periodic' ? (high ?? 0) - (low ?? 0) : 0)),
    units,
  };
}
