/** How small and how large friction and noise become, over the visited box and as far out as there is more to see. */

import type { Scenario } from '../documents/Scenario.js';
import { type Extreme, findSmallest, lookOutwards, type Outlook } from './extremes.js';
import { goesOn, type Reach } from './reach.js';
import { createScenarioEvaluator, type ScenarioEvaluator } from './ScenarioEvaluator.js';
import { rotationNorm, smallestSymmetricEigenvalue } from './smallMatrices.js';

export type BathName = 'friction' | 'noise' | 'diffusion';

export interface BathReader {
  /** Smallest and largest eigenvalue of the symmetric part, and the norm of the antisymmetric one. */
  readonly least: (name: BathName) => (place: Float64Array) => number;
  readonly most: (name: BathName) => (place: Float64Array) => number;
  readonly rotation: (place: Float64Array) => number;
}

export function readBath(evaluator: ScenarioEvaluator): BathReader {
  const { dimensions: d, bathSize, bathForm } = evaluator;
  const force = new Float64Array(d);
  const friction = new Float64Array(bathSize);
  const noise = new Float64Array(bathSize);
  const turned = new Float64Array(bathSize);
  const smallest = (values: Float64Array, sign: number): number => {
    for (let i = 0; i < bathSize; i++) turned[i] = sign * values[i];
    if (bathForm === 'matrix') return smallestSymmetricEigenvalue(turned, d);
    let least = turned[0];
    for (let i = 1; i < bathSize; i++) if (!(turned[i] >= least)) least = turned[i];
    return least;
  };
  const read =
    (sign: number) =>
    (name: BathName) =>
    (place: Float64Array): number => {
      evaluator.evaluateInto(place, force, friction, noise);
      return sign * smallest(name === 'friction' ? friction : noise, sign);
    };
  return {
    least: read(1),
    most: read(-1),
    rotation: (place) => {
      if (bathForm !== 'matrix') return 0;
      evaluator.evaluateInto(place, force, friction, noise);
      return rotationNorm(friction, d);
    },
  };
}

export interface BathRange {
  readonly least: Extreme;
  readonly most: number;
  readonly mostPlace: readonly number[];
  /** What is known far out: all of it, or only as far as was probed. */
  readonly farOut: 'known' | 'probed';
  readonly distance: number;
  readonly isGrowing: boolean;
  readonly isVanishing: boolean;
}

/** Smallest and largest value over the box, and beyond it as far as there is more to see. */
export function measureRange(
  scenario: Scenario,
  name: BathName,
  bath: BathReader,
  { box, endless }: Reach,
): BathRange {
  const smallest = bath.least(name);
  const largest = bath.most(name);
  let least = findSmallest(smallest, box);
  const top = findSmallest((place) => -largest(place), box);
  let most = -top.value;
  let mostPlace = top.place;
  const continued = continuedPlace(scenario);
  if (continued !== null) {
    // a fading coefficient lies between the edge of the box and its constant
    const far = smallest(continued);
    if (!(far >= least.value)) least = { value: far, place: [...continued] };
    if (!(largest(continued) <= most)) [most, mostPlace] = [largest(continued), [...continued]];
  }
  const open = endless.map((isEndless, axis) => isEndless && goesOn(scenario.coefficients[name], axis));
  if (!open.includes(true)) {
    return { least, most, mostPlace, farOut: 'known', distance: 0, isGrowing: false, isVanishing: false };
  }
  const low = lookOutwards(smallest, box, open);
  const high = lookOutwards((place) => -largest(place), box, open);
  for (const shell of low.shells) if (!(shell.value >= least.value)) least = shell;
  for (const shell of high.shells)
    if (!(-shell.value <= most)) [most, mostPlace] = [-shell.value, shell.place];
  return {
    least,
    most,
    mostPlace,
    farOut: 'probed',
    distance: low.distances[low.distances.length - 1],
    isGrowing: doubles(high, 2),
    isVanishing: doubles(low, 0.5),
  };
}

/** Whether the size on the last shell is the given factor or more beyond that half-way out. */
function doubles({ shells }: Outlook, factor: number): boolean {
  const last = Math.abs(shells[shells.length - 1].value);
  const middle = Math.abs(shells[shells.length >> 1].value);
  return factor > 1 ? !(last < factor * middle) && last > 0 : last <= factor * middle;
}

/** A place far outside the box, where a fading scenario has reached its constants; null for the others. */
function continuedPlace({ continuation, visited, axes }: Scenario): Float64Array | null {
  const axis = axes.findIndex(({ kind }) => kind === 'open');
  if (continuation.kind !== 'fade' || visited === null || axis < 0) return null;
  const place = Float64Array.from(visited.low, (low, a) => 0.5 * (low + visited.high[a]));
  place[axis] = visited.high[axis] + 2 * (continuation.width ?? 1);
  return place;
}

/** Share of the draws whose smallest eigenvalue is not positive somewhere on a coarse grid. */
export async function shareOfFailingDraws(
  scenario: Scenario,
  name: BathName,
  draws: readonly (readonly number[])[],
  { box }: Reach,
): Promise<number> {
  let failing = 0;
  const { dimensions: d } = scenario;
  const nodes = [40, 15, 7][d - 1];
  const place = new Float64Array(d);
  for (const draw of draws) {
    const smallest = readBath(await createScenarioEvaluator(scenario, draw, false)).least(name);
    let isPositive = true;
    for (let index = 0; index < nodes ** d && isPositive; index++) {
      let rest = index;
      for (let axis = 0; axis < d; axis++) {
        place[axis] = box.low[axis] + ((rest % nodes) / (nodes - 1)) * (box.high[axis] - box.low[axis]);
        rest = Math.floor(rest / nodes);
      }
      isPositive = smallest(place) > 0;
    }
    if (!isPositive) failing++;
  }
  return draws.length === 0 ? 0 : failing / draws.length;
}
