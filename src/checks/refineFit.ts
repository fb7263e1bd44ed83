/**
 * Removes what finite sampling leaves in a fit, by indirect inference: the fitted model is simulated at the recorded
 * design and fitted again; where the refits come out on average differs from what was put in by the estimator's bias,
 * so the put-in coefficients are moved until the refits come out where the recording did.
 *
 * The move of a coefficient field is damped by the share of it that the scatter of the few refits explains, and rounds
 * end when what is left to move is small against the error of the fit. Replicates move along, and are spread by what
 * the scatter of the mean refit adds.
 *
 * Source  Gouriéroux, Monfort & Renault, Indirect inference, J. Appl. Econometrics 8 (1993) S85; damping: James & Stein,
 *         Proc. Fourth Berkeley Symp. 1 (1961) 361.
 */

import type { FitOfAnyOrigin, FitResult } from '../documents/FitDocument.js';
import type { Warning } from '../errors.js';
import type { Model } from '../fields/CoefficientField.js';
import { modelFields, modelParameters, withParameters } from '../fields/modelParameters.js';
import { type MapTasks, mapTasksSerially, type Task } from '../numerics/MapTasks.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { visitedCentres } from '../tracks/visitedRegion.js';
import { evaluateColumns, planColumns } from '../uncertainty/columns.js';
import { measureDistance } from '../uncertainty/scales.js';
import { measureSpread } from '../uncertainty/spread.js';
import { createRefit } from './createRefit.js';
import { createDesign, type Design, simulateDesign } from './simulateDesign.js';

export interface RefineOptions {
  readonly seed: number;
  readonly mapTasks?: MapTasks;
  /** Simulated recordings per round. */
  readonly replicates?: number;
  readonly onProgress?: (done: number, total: number) => void;
}

const REPLICATES = 8; // adds an eighth of the fit's own variance, 6 % to its intervals
const FEWEST = 4; // usable refits below which nothing is removed
const MOST_ROUNDS = 3;
const ENOUGH = 0.25; // of the fit's standard deviations, root mean square over places: the move that needs no more

interface SharedWork {
  readonly design: Design;
  readonly fit: FitOfAnyOrigin;
  readonly seed: number;
}

interface Replicate {
  readonly index: number;
  readonly parameters: readonly number[];
}

/** Simulates the recording once with given coefficients and fits it again; null where that fails. */
export const refitReplicateTask: Task<SharedWork, Replicate, number[] | null> = {
  name: 'refit-replicate',
  async run({ design, fit, seed }, { index, parameters }) {
    // The same random numbers in every round, so that rounds differ by the coefficients alone.
    const positions = simulateDesign(design, parameters, seed, `refine-${index}`, false);
    const refitted = await createRefit(fit)({ ...design.tracks, positions });
    return refitted && Array.from(refitted);
  },
};

/**
 * @param tracks  the recording the fit was made from, usable tracks only
 * @returns the fit with moved coefficients and replicates; `diagnostics.refinement` says by how much, column by column
 */
export async function refineFit(
  fit: FitResult,
  tracks: TrackSet,
  options: RefineOptions,
): Promise<FitResult> {
  const mapTasks = options.mapTasks ?? mapTasksSerially;
  const wanted = options.replicates ?? REPLICATES;
  const shared: SharedWork = { design: createDesign(fit, tracks), fit, seed: options.seed };
  const target = modelParameters(fit.model);
  const centres = visitedCentres(fit.visited);
  const spreads = measureSpread(fit.model, fit.uncertainty.replicates, centres);
  let parameters = target;
  let rounds = 0;
  let left = Infinity;
  let usable = wanted;
  while (rounds < MOST_ROUNDS && left > ENOUGH) {
    rounds++;
    const inputs = Array.from({ length: wanted }, (_, index) => ({
      index,
      parameters: Array.from(parameters),
    }));
    const done = (count: number): void =>
      options.onProgress?.((rounds - 1) * wanted + count, MOST_ROUNDS * wanted);
    const refits = (await mapTasks(refitReplicateTask, shared, inputs, done)).filter(
      (refit) => refit !== null,
    );
    usable = Math.min(usable, refits.length);
    if (refits.length < FEWEST)
      return { ...fit, warnings: [...fit.warnings, unrefined(refits.length, wanted)] };
    const move = dampedMove(fit, target, refits);
    const moved = parameters.map((value, i) => value + move[i]);
    left = measureMove(fit, parameters, moved, centres, spreads);
    parameters = moved;
  }
  const shift = parameters.map((value, i) => value - target[i]);
  const widening = Math.sqrt(1 + 1 / usable);
  const model = withParameters(fit.model, parameters);
  const settled = left <= ENOUGH;
  return {
    ...fit,
    model: model as FitResult['model'],
    uncertainty: {
      ...fit.uncertainty,
      replicates: fit.uncertainty.replicates.map((row) =>
        row.map((value, i) => target[i] + shift[i] + widening * (value - target[i])),
      ),
    },
    diagnostics: {
      ...fit.diagnostics,
      refinement: { rounds, replicates: usable, settled, removed: describeRemoved(fit, model, centres) },
    },
    warnings: settled ? fit.warnings : [...fit.warnings, UNSETTLED],
  };
}

const UNSETTLED: Warning = {
  code: 'refinement-unsettled',
  message:
    'the bias removed by re-simulation was still moving when the rounds ran out; compare with the fit without --refine',
};

function unrefined(found: number, wanted: number): Warning {
  return {
    code: 'not-refined',
    message: `only ${found} of ${wanted} simulated recordings could be fitted again, so no bias was removed; try simpler shapes`,
  };
}

/** Target minus mean refit, each field's move damped by the share its scatter explains. */
function dampedMove(fit: FitResult, target: Float64Array, refits: readonly number[][]): Float64Array {
  const n = refits.length;
  const move = new Float64Array(target.length);
  const variance = new Float64Array(target.length);
  for (let i = 0; i < target.length; i++) {
    let mean = 0;
    for (const refit of refits) mean += refit[i] / n;
    let squares = 0;
    for (const refit of refits) squares += (refit[i] - mean) ** 2;
    move[i] = target[i] - mean;
    variance[i] = squares / ((n - 1) * n);
  }
  let at = 0;
  for (const field of modelFields(fit.model)) {
    for (const component of field.coefficients) {
      let moved = 0;
      let chance = 0;
      for (let i = at; i < at + component.length; i++) {
        moved += move[i] ** 2;
        chance += variance[i];
      }
      const kept = moved > 0 ? Math.max(0, 1 - chance / moved) : 0;
      for (let i = at; i < at + component.length; i++) move[i] *= kept;
      at += component.length;
    }
  }
  return move;
}

/** Largest over columns: root mean square over the visited places of the change in standard deviations of the fit. */
function measureMove(
  fit: FitResult,
  from: Float64Array,
  to: Float64Array,
  centres: Float64Array,
  spreads: ReturnType<typeof measureSpread>,
): number {
  const before = evaluateColumns(withParameters(fit.model, from), centres);
  const after = evaluateColumns(withParameters(fit.model, to), centres);
  let largest = 0;
  spreads.forEach((spread, column) => {
    let squares = 0;
    let count = 0;
    for (let place = 0; place < spread.values.length; place++) {
      if (!(spread.deviations[place] > 0)) continue;
      const change = measureDistance(spread.scale, before[column][place], after[column][place]);
      squares += (change / spread.deviations[place]) ** 2;
      count++;
    }
    if (count > 0) largest = Math.max(largest, Math.sqrt(squares / count));
  });
  return largest;
}

/** Per column: root mean square of what was removed over that of the column, dimensionless. */
function describeRemoved(fit: FitResult, model: Model, centres: Float64Array): Record<string, number> {
  const before = evaluateColumns(fit.model, centres);
  const after = evaluateColumns(model, centres);
  return Object.fromEntries(
    planColumns(fit.model).map(({ name }, column) => {
      let squares = 0;
      let size = 0;
      for (let place = 0; place < before[column].length; place++) {
        squares += (after[column][place] - before[column][place]) ** 2;
        size += after[column][place] ** 2;
      }
      return [name, size > 0 ? Math.sqrt(squares / size) : 0];
    }),
  );
}
