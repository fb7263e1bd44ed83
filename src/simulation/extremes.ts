/** Where a function of place is smallest over a box, and how it goes on at large distances. */

import { randomStream } from '../numerics/random/RandomStream.js';

export interface Extreme {
  readonly value: number;
  readonly place: number[];
}

export interface Box {
  readonly low: readonly number[];
  readonly high: readonly number[];
}

const NODES = [401, 61, 19]; // grid nodes per axis, by dimension, edges included
const CANDIDATES = 3; // grid nodes from which the search goes on
const REFINEMENTS = 12; // halvings of the grid spacing

/**
 * The smallest value over a box: a grid with its edges, then a pattern search around the best nodes (Hooke & Jeeves,
 * J. ACM 8 (1961) 212). A function that turns non-finite is smallest there.
 *
 * @param f  function of a place of length d
 */
export function findSmallest(f: (place: Float64Array) => number, box: Box): Extreme {
  const d = box.low.length;
  const nodes = NODES[d - 1];
  const place = new Float64Array(d);
  const widths = box.low.map((low, axis) => (box.high[axis] - low) / (nodes - 1));
  let best: Extreme[] = [];
  for (let index = 0; index < nodes ** d; index++) {
    let rest = index;
    for (let axis = 0; axis < d; axis++) {
      const node = rest % nodes;
      place[axis] = node === nodes - 1 ? box.high[axis] : box.low[axis] + node * widths[axis];
      rest = Math.floor(rest / nodes);
    }
    const value = f(place);
    if (!Number.isFinite(value)) return { value, place: [...place] };
    if (best.length < CANDIDATES || value < best[CANDIDATES - 1].value) {
      best = [...best, { value, place: [...place] }].sort((a, b) => a.value - b.value).slice(0, CANDIDATES);
    }
  }
  return best
    .map((start) => descend(f, box, start, widths))
    .reduce((least, found) => (found.value < least.value ? found : least));
}

function descend(
  f: (place: Float64Array) => number,
  box: Box,
  start: Extreme,
  widths: readonly number[],
): Extreme {
  const place = Float64Array.from(start.place);
  let { value } = start;
  for (let round = 1; round <= REFINEMENTS; round++) {
    for (let axis = 0; axis < place.length; axis++) {
      for (const side of [-1, 1]) {
        const before = place[axis];
        const moved = before + side * widths[axis] * 0.5 ** round;
        place[axis] = Math.min(box.high[axis], Math.max(box.low[axis], moved));
        const tried = f(place);
        if (tried < value) value = tried;
        else place[axis] = before;
      }
    }
  }
  return { value, place: [...place] };
}

const SHELLS = 16; // doublings of the distance
const DIRECTIONS = [4, 24, 60]; // places per shell, by dimension

/** The smallest value on each of a row of shells, each twice as far out as the one before. */
export interface Outlook {
  /** One extreme per shell; a non-finite value ends the row. */
  readonly shells: readonly Extreme[];
  readonly distances: readonly number[];
}

/**
 * Follows a function outwards from a box along its open axes; along the others places are spread over the box.
 *
 * @param isOpen  per axis
 */
export function lookOutwards(
  f: (place: Float64Array) => number,
  box: Box,
  isOpen: readonly boolean[],
): Outlook {
  const d = box.low.length;
  const stream = randomStream(1, 'shells');
  const half = box.low.map((low, axis) => 0.5 * (box.high[axis] - low));
  const reach = Math.hypot(...half.filter((_, axis) => isOpen[axis]));
  const openCount = isOpen.filter(Boolean).length;
  const places = Array.from({ length: DIRECTIONS[d - 1] }, (_, index) => {
    const direction = isOpen.map((open) => (open ? stream.normal() : 2 * stream.uniform() - 1));
    // the axes themselves come first, because separable formulas show there what they do
    if (index < 2 * openCount) {
      let seen = -1;
      isOpen.forEach((open, axis) => {
        if (!open) return;
        seen++;
        direction[axis] = seen === index >> 1 ? (index % 2 === 0 ? 1 : -1) : 0;
      });
    }
    const length = Math.hypot(...direction.filter((_, axis) => isOpen[axis]));
    return direction.map((value, axis) => (isOpen[axis] ? value / length : value));
  });
  const shells: Extreme[] = [];
  const distances: number[] = [];
  const place = new Float64Array(d);
  for (let shell = 1; shell <= SHELLS; shell++) {
    const distance = reach * 2 ** shell;
    let least: Extreme | null = null;
    for (const direction of places) {
      for (let axis = 0; axis < d; axis++) {
        const centre = box.low[axis] + half[axis];
        place[axis] = centre + direction[axis] * (isOpen[axis] ? distance : half[axis]);
      }
      const value = f(place);
      if (least === null || value < least.value || Number.isNaN(value)) least = { value, place: [...place] };
      if (Number.isNaN(value)) break;
    }
    if (least === null) break;
    distances.push(distance);
    shells.push(least);
    if (!Number.isFinite(least.value)) break;
  }
  return { shells, distances };
}
