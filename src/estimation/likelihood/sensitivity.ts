/**
 * How the score answers to the parameters: minus its derivatives, from differences of whole passes. The information summed
 * over places is as good where coefficients hardly change over what the filter remembers and over the spread of the
 * particle within a step; to shorter waves the score answers less, and estimates scatter more, than it says.
 *
 * Parameters of functions far apart are moved together, for the score of one hardly feels the other.
 *
 * Source  estimating equations and their sensitivity: Godambe, Ann. Math. Statist. 31 (1960) 1208; several columns of a
 *         sparse Jacobian from one difference: Curtis, Powell & Reid, J. Inst. Maths Applics 13 (1974) 117.
 */

import type { FieldSlot, LikelihoodLayout } from './layout.js';
import type { PathPass } from './PathPass.js';
import type { ScoringSolution } from './scoring.js';

const STEP = 0.25; // standard errors: long against the jumps where steps are divided anew, short against curvature
const LONGEST_STEP = 0.5; // of a logarithm
const SPACING = 12; // functions from one that is moved to the next along an axis: twice three cells beyond its support

/** Where parameters belong, and which are moved together. */
export interface SensitivityPlan {
  /** Parameters that are moved together. */
  readonly groups: readonly (readonly number[])[];
  /** Length p, per parameter: number of its function along each axis; null where it is felt everywhere. */
  readonly cells: readonly (readonly number[] | null)[];
  /** Functions along each axis where they wrap, 0 elsewhere. */
  readonly wraps: readonly number[];
  /** The first parameter that is a logarithm; those after it are too. */
  readonly firstLogarithm: number;
}

export function planSensitivity(layout: LikelihoodLayout): SensitivityPlan {
  const cells: (number[] | null)[] = new Array<number[] | null>(layout.size).fill(null);
  const slots = [layout.force, layout.friction, layout.noise].filter(
    (slot) => slot !== null && slot.basis >= 0,
  );
  const [common] = slots as FieldSlot[];
  const spec = layout.bases[common.basis].spec;
  // Functions of different bases are not told apart by their numbers.
  const isShared = spec.kind === 'spline' && slots.every((slot) => slot?.basis === common.basis);
  const groups = new Map<string, number[]>();
  for (let i = 0; i < layout.size; i++) groups.set(String(i), [i]);
  const firstLogarithm = layout.force.offset + layout.force.components * layout.force.functionCount;
  if (!isShared) return { groups: [...groups.values()], cells, wraps: [], firstLogarithm };
  const d = layout.dimensions;
  for (const slot of slots as FieldSlot[]) {
    for (let component = 0; component < slot.components; component++) {
      for (let f = 0; f < slot.functionCount; f++) {
        const i = slot.offset + component * slot.functionCount + f;
        const cell = new Array<number>(d);
        for (let axis = d - 1, rest = f; axis >= 0; axis--) {
          cell[axis] = rest % spec.counts[axis];
          rest = Math.floor(rest / spec.counts[axis]);
        }
        cells[i] = cell;
        const key = `${slot.offset + component}: ${cell.map((at, axis) => at % spacingOf(spec.counts[axis], spec.periods[axis])).join(' ')}`;
        groups.delete(String(i));
        groups.set(key, [...(groups.get(key) ?? []), i]);
      }
    }
  }
  const wraps = spec.counts.map((count, axis) => (spec.periods[axis] > 0 ? count : 0));
  return { groups: [...groups.values()], cells, wraps, firstLogarithm };
}

/** On an axis that wraps the last and the first moved must be as far apart as the others. */
function spacingOf(count: number, period: number): number {
  if (period === 0) return SPACING;
  const turns = Math.max(1, Math.floor(count / SPACING));
  return count % turns === 0 ? count / turns : count;
}

/**
 * @param blocks  number of blocks of the scores
 * @returns shape (p, p), symmetric: minus the mean of the derivative of score i along parameter j and of j along i
 *
 * Cost  one pass per group.
 */
export function measureSensitivity(
  pass: PathPass,
  { groups, cells, wraps, firstLogarithm }: SensitivityPlan,
  { parameters, scores, inverse }: ScoringSolution,
  blocks: number,
): Float64Array {
  const p = parameters.length;
  const here = sumBlocks(scores, p);
  const moved = parameters.slice();
  const movedScores = new Float64Array(blocks * p);
  const answers = new Float64Array(p * p);
  const known = new Uint8Array(p * p);
  for (const group of groups) {
    const steps = group.map((j) =>
      Math.min(STEP * Math.sqrt(inverse[j * p + j]), j < firstLogarithm ? Infinity : LONGEST_STEP),
    );
    group.forEach((j, m) => void (moved[j] = parameters[j] + steps[m]));
    pass.run(moved, movedScores);
    for (const j of group) moved[j] = parameters[j];
    const there = sumBlocks(movedScores, p);
    for (let i = 0; i < p; i++) {
      const m = group.length === 1 ? 0 : findNearest(cells, wraps, group, i);
      if (m < 0) continue;
      answers[i * p + group[m]] = (here[i] - there[i]) / steps[m];
      known[i * p + group[m]] = 1;
    }
  }
  const out = new Float64Array(p * p);
  for (let i = 0; i < p; i++) {
    for (let j = 0; j <= i; j++) {
      const count = known[i * p + j] + known[j * p + i];
      const value = count > 0 ? (answers[i * p + j] + answers[j * p + i]) / count : 0;
      out[i * p + j] = out[j * p + i] = value;
    }
  }
  return out;
}

/** Which of the moved parameters a score answers to; −1 where that cannot be told, or where all are far. */
function findNearest(
  cells: SensitivityPlan['cells'],
  wraps: readonly number[],
  group: readonly number[],
  i: number,
): number {
  const own = cells[i];
  if (own === null) return -1;
  let nearest = -1;
  let least = SPACING / 2;
  group.forEach((j, m) => {
    const other = cells[j] as readonly number[];
    let distance = 0;
    own.forEach((at, axis) => {
      const apart = Math.abs(at - other[axis]);
      distance = Math.max(distance, wraps[axis] > 0 ? Math.min(apart, wraps[axis] - apart) : apart);
    });
    if (distance >= least) return;
    least = distance;
    nearest = m;
  });
  return nearest;
}

function sumBlocks(scores: Float64Array, p: number): Float64Array {
  const sums = new Float64Array(p);
  for (let i = 0; i < scores.length; i++) sums[i % p] += scores[i];
  return sums;
}
