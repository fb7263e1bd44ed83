/**
 * Whether the force (drift at first order) keeps particles together on open axes.
 *
 * Held coefficients: outside the visited box each component depends on the other coordinates alone, so a force that
 * points inward on every face does so everywhere beyond it. A restoring force that grows with the distance outweighs
 * every bounded one. Linear forces q̈ = −K q + A q − Γ q̇ with K symmetric and A antisymmetric have the Lyapunov
 * function ½|v|² + ½ q·(K + εγ̄)q + ε q·v, which decays if for some ε, with ε² < k + εγ̄,
 *
 *   4 (γ − ε) ε k > (a + ε g)² ,
 *
 * k the smallest eigenvalue of K, a = ‖A‖, γ the smallest friction, γ̄ the middle of its range and g the largest
 * ‖Γ − γ̄‖: a stirring force must not be too strong for friction and trap. With uniform friction this is a² < Γ²k, which
 * is exact.
 *
 * Source  Khasminskii, Stochastic Stability of Differential Equations (2nd ed. 2012), ch. 3–4; Mattingly, Stuart &
 *         Higham, Stoch. Process. Appl. 101 (2002) 185, for the cross term; both from memory.
 */

import type { Scenario } from '../documents/Scenario.js';
import { randomStream } from '../numerics/random/RandomStream.js';
import { type Box, type Extreme, findSmallest, lookOutwards } from './extremes.js';
import { goesOn } from './reach.js';
import { smallestSymmetricEigenvalue } from './smallMatrices.js';

/** The force, or the drift in the Itô reading, at a place. */
export type ForceReader = (place: Float64Array, out: Float64Array) => void;

/** Smallest and largest eigenvalue of the friction's symmetric part, and the largest norm of the rest. */
export interface FrictionRange {
  readonly least: number;
  readonly most: number;
  readonly rotation: number;
}

export interface ConfinementFinding {
  readonly verdict: 'holds' | 'fails' | 'unknown';
  /** Weakest inward force on the faces, stiffness, or smallest eigenvalue of −∂F; null where nothing was measured. */
  readonly value: number | null;
  readonly place: readonly number[] | null;
  readonly kind: 'closed' | 'stiffness' | 'fade' | 'faces' | 'linear' | 'stirred' | 'distance' | 'coupled';
}

/**
 * @param box  where the coefficients show all of themselves (`findReach`)
 * @param friction  second order; null at first order
 */
export function assessConfinement(
  scenario: Scenario,
  readForce: ForceReader,
  box: Box,
  friction: FrictionRange | null,
): ConfinementFinding {
  const { axes, continuation, visited, order } = scenario;
  const open = axes.map(({ kind }) => kind === 'open');
  if (!open.includes(true)) return { verdict: 'holds', value: null, place: null, kind: 'closed' };
  if (visited !== null && continuation.kind !== 'hold' && continuation.stiffness !== null) {
    return { verdict: 'holds', value: continuation.stiffness, place: null, kind: 'stiffness' };
  }
  if (visited !== null && continuation.kind === 'fade') {
    return { verdict: 'fails', value: null, place: null, kind: 'fade' };
  }
  const coefficient = scenario.coefficients[order === 'second' ? 'force' : 'drift'];
  const endless = visited === null && open.some((isOpen, axis) => isOpen && goesOn(coefficient, axis));
  if (!endless) return assessFaces(scenario, readForce, box, open);
  return assessLinear(readForce, box, open, friction) ?? assessDistance(readForce, box, open);
}

/** Held coefficients: the weakest inward force over all faces. */
function assessFaces(
  scenario: Scenario,
  readForce: ForceReader,
  box: Box,
  open: readonly boolean[],
): ConfinementFinding {
  const d = open.length;
  const force = new Float64Array(d);
  const beyond = new Float64Array(d);
  let weakest: Extreme | null = null;
  for (let axis = 0; axis < d; axis++) {
    if (!open[axis]) continue;
    for (const side of [-1, 1]) {
      // a little beyond the face, where nothing depends on this coordinate any more
      const edge = side < 0 ? box.low[axis] : box.high[axis];
      const outside = edge + side * 0.01 * (box.high[axis] - box.low[axis]);
      const found = findSmallest(
        (place) => {
          beyond.set(place);
          beyond[axis] = outside;
          readForce(beyond, force);
          return -side * force[axis];
        },
        { low: replace(box.low, axis, edge), high: replace(box.high, axis, edge) },
      );
      if (weakest === null || !(found.value >= weakest.value)) weakest = found;
    }
  }
  if (weakest === null) throw new Error('a scenario without open axes has no faces');
  const { value, place } = weakest;
  if (!(value > 0)) return { verdict: 'fails', value, place, kind: 'faces' };
  // Off-diagonal friction turns motion along one axis into force along another: then no bound follows.
  const isCoupled = scenario.coefficients.friction?.form === 'matrix' && d > 1;
  return { verdict: isCoupled ? 'unknown' : 'holds', value, place, kind: isCoupled ? 'coupled' : 'faces' };
}

function replace(values: readonly number[], axis: number, value: number): number[] {
  return values.map((own, a) => (a === axis ? value : own));
}

const LINEAR_TOLERANCE = 1e-8; // of the force's size: rounding of formulas

/** Linear along the open axes and without dependence on the closed ones; null where the force is not of that kind. */
function assessLinear(
  readForce: ForceReader,
  box: Box,
  open: readonly boolean[],
  friction: FrictionRange | null,
): ConfinementFinding | null {
  const d = open.length;
  const axes = open.flatMap((isOpen, axis) => (isOpen ? [axis] : []));
  const middle = box.low.map((low, axis) => 0.5 * (low + box.high[axis]));
  const scale = box.low.map((low, axis) => box.high[axis] - low);
  const at = (place: readonly number[]): Float64Array => {
    const force = new Float64Array(d);
    readForce(Float64Array.from(place), force);
    return force;
  };
  const centre = at(middle);
  const columns = axes.map((axis) => {
    const moved = at(replace(middle, axis, middle[axis] + scale[axis]));
    return moved.map((value, i) => (value - centre[i]) / scale[axis]);
  });
  const stream = randomStream(1, 'linear-force');
  for (let trial = 0; trial < 30; trial++) {
    const far = 10 ** (trial % 4);
    const place = middle.map(
      (value, axis) => value + (open[axis] ? far : 0.5) * scale[axis] * (2 * stream.uniform() - 1),
    );
    const force = at(place);
    for (let i = 0; i < d; i++) {
      let expected = centre[i];
      let size = Math.abs(expected);
      axes.forEach((axis, k) => {
        const term = columns[k][i] * (place[axis] - middle[axis]);
        expected += term;
        size += Math.abs(term);
      });
      if (!(Math.abs(force[i] - expected) <= LINEAR_TOLERANCE * (size + Number.MIN_VALUE))) return null;
    }
  }
  const n = axes.length;
  const inward = new Float64Array(n * n); // −∂F over the open axes
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) inward[i * n + j] = -columns[j][axes[i]];
  const stiffness = smallestSymmetricEigenvalue(inward, n);
  if (!(stiffness > 0)) return { verdict: 'fails', value: stiffness, place: null, kind: 'linear' };
  let square = 0; // of the Frobenius norm of the antisymmetric part, which bounds its spectral norm from above
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++) square += 0.25 * (inward[i * n + j] - inward[j * n + i]) ** 2;
  const stirring = Math.sqrt(square / 2); // in two and three dimensions exactly the spectral norm
  if (friction === null || stirring === 0 || isDamped(stiffness, stirring, friction)) {
    return { verdict: 'holds', value: stiffness, place: null, kind: 'linear' };
  }
  return { verdict: 'unknown', value: stirring, place: null, kind: 'stirred' };
}

/** Whether some ε of the cross term makes the Lyapunov function decay (see above). */
function isDamped(k: number, a: number, { least, most, rotation }: FrictionRange): boolean {
  const middle = 0.5 * (least + most);
  const spread = 0.5 * (most - least) + rotation;
  for (let i = 1; i < 400; i++) {
    const epsilon = least * (i / 400);
    if (epsilon ** 2 >= k + epsilon * middle) continue;
    if (4 * (least - epsilon) * epsilon * k > (a + epsilon * spread) ** 2) return true;
  }
  return false;
}

/** The weakest inward force on shells farther and farther out. */
function assessDistance(readForce: ForceReader, box: Box, open: readonly boolean[]): ConfinementFinding {
  const force = new Float64Array(open.length);
  const inward = (place: Float64Array): number => {
    readForce(place, force);
    let sum = 0;
    let square = 0;
    for (let axis = 0; axis < open.length; axis++) {
      if (!open[axis]) continue;
      const away = place[axis] - 0.5 * (box.low[axis] + box.high[axis]);
      sum -= away * force[axis];
      square += away * away;
    }
    return sum / Math.sqrt(square);
  };
  const { shells } = lookOutwards(inward, box, open);
  const last = shells.filter(({ value }) => Number.isFinite(value)).slice(-3);
  const worst = last.reduce<Extreme | null>(
    (least, shell) => (least === null || shell.value < least.value ? shell : least),
    null,
  );
  if (worst === null) return { verdict: 'unknown', value: null, place: null, kind: 'distance' };
  return {
    verdict: worst.value > 0 ? 'unknown' : 'fails',
    value: worst.value,
    place: worst.place,
    kind: 'distance',
  };
}
