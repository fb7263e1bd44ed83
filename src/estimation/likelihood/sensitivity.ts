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
  const slots = [layout.force, layout.friction, layout.noise].filter(
    (slot): slot is FieldSlot => slot !== null && slot.basis >= 0,
  );
  const { spec } = layout.bases[slots[0].basis];
  // Functions of different bases are not told apart by their numbers.
  const counts =
    spec.kind === 'spline' && slots.every(({ basis }) => basis === slots[0].basis) ? spec.counts : [];
  const periods = spec.kind === 'spline' ? spec.periods : [];
  const cells = new Array<number[] | null>(layout.size).fill(null);
  const groups = new Map<string, number[]>();
  const join = (i: number, key: string): void => void groups.set(key, [...(groups.get(key) ?? []), i]);
  for (const { offset, components, functionCount } of counts.length > 0 ? slots : []) {
    for (let i = 0; i < components * functionCount; i++) {
      const cell = unravel(i % functionCount, counts);
      const turn = cell.map((at, axis) => at % spacingOf(counts[axis], periods[axis]));
      cells[offset + i] = cell;
      join(offset + i, `${offset}, ${Math.floor(i / functionCount)}: ${turn.join(' ')}`);
    }
  }
  cells.forEach((cell, i) => {
    if (cell === null) join(i, `alone: ${i}`);
  });
  return {
    groups: [...groups.values()],
    cells,
    wraps: counts.map((count, axis) => (periods[axis] > 0 ? count : 0)),
    firstLogarithm: layout.force.offset + layout.force.components * layout.force.functionCount,
  };
}

/** Number of a function along each axis, the last axis fastest. */
function unravel(number: number, counts: readonly number[]): number[] {
  const out = new Array<number>(counts.length);
  let rest = number;
  for (let axis = counts.length - 1; axis >= 0; axis--) {
    out[axis] = rest % counts[axis];
    rest = Math.floor(rest / counts[axis]);
  }
  return out;
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
