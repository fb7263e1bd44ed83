/**
 * A conservative force: minus the gradient of a potential. Then its curl vanishes everywhere, and in a periodic box the
 * mean force round each loop vanishes too (a force without curl may still push round the box).
 */

import type { Model } from '../fields/CoefficientField.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import { meanOf } from '../numerics/statistics/meanOf.js';
import type { VisitedRegion } from '../tracks/visitedRegion.js';
import { createForceReader, readCurl } from './readForce.js';
import { imposePotential } from './imposePotential.js';
import { identity, type Statement } from './Statement.js';

const POINTS_ROUND = 48; // per loop; the spline has a few functions to a loop
const LOOPS = 40; // nodes through which loops are laid

/**
 * Reported beside the verdict: the mean curl, the circulation round the core of the visited region (two dimensions; the
 * integral of the curl over the most visited cells that hold half of the positions, Stokes' theorem), and the mean
 * force round each loop.
 *
 * @param nodes  shape (m, d): places that stand for the occupancy
 * @param steps  length d: for derivatives, length
 */
export function createConservativeStatement(
  model: Model,
  nodes: Float64Array,
  steps: Float64Array,
  visited: VisitedRegion,
): Statement {
  const d = model.dimensions;
  const curls = d === 1 ? [] : d === 2 ? ['curl'] : ['curl_x', 'curl_y', 'curl_z'];
  const loops = model.periods.flatMap((period, axis) =>
    period > 0 ? [{ axis, period, places: layLoops(nodes, d, axis, period) }] : [],
  );
  const loopNames = loops.map(({ axis }) => `loop_force_${COORDINATE_NAMES[axis]}`);
  const readLoops = (at: Model): number[] => {
    const read = createForceReader(at, steps, true);
    const force = new Float64Array(d);
    return loops.map(({ axis, places }) => {
      let sum = 0;
      for (let offset = 0; offset < places.length; offset += d) {
        read(places, offset, force);
        sum += force[axis];
      }
      return (sum * d) / places.length;
    });
  };
  const readCurls = (at: Model, places: Float64Array): Float64Array[] =>
    d === 1 ? [] : readCurl(createForceReader(at, steps, true), places, steps);
  const core = d === 2 ? findCore(visited) : null;
  return {
    parameterNames: [],
    columnNames: curls,
    residualNames: curls,
    extraNames: loopNames,
    logarithmic: false,
    columns: readCurls,
    extras: readLoops,
    reportNames: [...curls, ...(core === null ? [] : ['circulation']), ...loopNames],
    reports: (at) => [
      ...readCurls(at, nodes).map(meanOf),
      ...(core === null ? [] : [core.area * meanOf(readCurls(at, core.places)[0])]),
      ...readLoops(at),
    ],
    combination: () => identity(curls.length),
    target: () => null,
    impose: (at, _parameters, places) => imposePotential(at, places, steps),
    starts: () => [new Float64Array(0)],
  };
}

/** The most visited cells that together hold half of the positions: their centres, and the area they cover. */
export function findCore(visited: VisitedRegion): { places: Float64Array; area: number } {
  const { cells, counts, low, high } = visited;
  const total = counts.reduce((sum, count) => sum + count, 0);
  const order = counts.map((_, cell) => cell).sort((a, b) => counts[b] - counts[a]);
  const sides = cells.map((count, axis) => (high[axis] - low[axis]) / count);
  const places: number[] = [];
  let held = 0;
  for (const cell of order) {
    if (held >= total / 2) break;
    held += counts[cell];
    places.push(
      low[0] + (Math.floor(cell / cells[1]) + 0.5) * sides[0],
      low[1] + ((cell % cells[1]) + 0.5) * sides[1],
    );
  }
  return { places: Float64Array.from(places), area: (places.length / 2) * sides[0] * sides[1] };
}

/** Closed loops along a periodic axis through places the tracks visited, shape (loops · points, d). */
function layLoops(nodes: Float64Array, d: number, axis: number, period: number): Float64Array {
  const m = nodes.length / d;
  const count = d === 1 ? 1 : Math.min(LOOPS, m);
  const places = new Float64Array(count * POINTS_ROUND * d);
  for (let loop = 0; loop < count; loop++) {
    const node = Math.floor(((loop + 0.5) * m) / count);
    for (let point = 0; point < POINTS_ROUND; point++) {
      const at = (loop * POINTS_ROUND + point) * d;
      for (let i = 0; i < d; i++) places[at + i] = nodes[node * d + i];
      places[at + axis] = ((point + 0.5) / POINTS_ROUND) * period;
    }
  }
  return places;
}
