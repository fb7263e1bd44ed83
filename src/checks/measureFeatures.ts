/** Takes from a recording, or from a simulated one, the numbers that a layout lists. */

import {
  BIN_EDGES,
  countPlanes,
  DISPLACEMENT_BINS,
  type FeatureLayout,
  findBlock,
  SPEED_BINS,
  SPEED_REACH,
} from './featureLayout.js';
import { measurePassages } from './passages.js';

/**
 * Takes the features from positions at the rows of the recording.
 *
 * @param positions  shape (n, d), unwrapped
 * @returns length `layout.length`; NaN where nothing was counted
 */
export function measureFeatures(layout: FeatureLayout, positions: Float64Array): Float64Array {
  const out = new Float64Array(layout.length);
  measureOccupancy(layout, positions, out);
  measureDistributions(layout, positions, out);
  measureLags(layout, positions, out);
  measureMaps(layout, positions, out);
  measureTemperatureCurve(layout, positions, out);
  const [first] = layout.passages?.kinds ?? [];
  const passages = first && findBlock(layout, first.name);
  if (layout.passages && passages) measurePassages(layout.passages, positions, out, passages.offset);
  return out;
}

/** Coordinate as a share of the box along one axis, from 0 to just below 1; wrapped or held at the edges. */
function shareOfBox(layout: FeatureLayout, x: number, axis: number): number {
  const low = layout.low[axis];
  const width = layout.high[axis] - low;
  let share = (x - low) / width;
  if (layout.periods[axis] > 0) share = ((x - low) / layout.periods[axis]) % 1;
  if (share < 0) share = layout.periods[axis] > 0 ? share + 1 : 0;
  return share < 1 ? share : 1 - 1e-12;
}

function cellOf(layout: FeatureLayout, positions: Float64Array, row: number): number {
  const d = layout.dimensions;
  let cell = 0;
  for (let axis = 0; axis < d; axis++) {
    cell =
      cell * layout.cellsPerAxis +
      Math.floor(shareOfBox(layout, positions[row * d + axis], axis) * layout.cellsPerAxis);
  }
  return cell;
}

function measureOccupancy(layout: FeatureLayout, positions: Float64Array, out: Float64Array): void {
  const d = layout.dimensions;
  const rows = positions.length / d;
  const cells = findBlock(layout, 'occupancy');
  const curve = findBlock(layout, 'curve:occupancy');
  if (cells === undefined || curve === undefined) return;
  for (let row = 0; row < rows; row++) {
    out[cells.offset + cellOf(layout, positions, row)] += 1 / rows;
    for (let axis = 0; axis < d; axis++) {
      const share = shareOfBox(layout, positions[row * d + axis], axis);
      out[curve.offset + axis * layout.binsPerAxis + Math.floor(share * layout.binsPerAxis)] += 1 / rows;
    }
  }
}

function measureDistributions(layout: FeatureLayout, positions: Float64Array, out: Float64Array): void {
  const { dimensions: d, runs, displacementLags, displacementScales } = layout;
  const velocity = findBlock(layout, 'velocity-distribution');
  const later = findBlock(layout, 'displacement-distribution');
  const speed = findBlock(layout, 'curve:speed');
  if (velocity === undefined || speed === undefined) return;
  displacementLags.forEach((lag, lagIndex) => {
    const size = d * DISPLACEMENT_BINS;
    const base = lagIndex === 0 ? velocity.offset : (later?.offset ?? 0) + (lagIndex - 1) * size;
    let pairs = 0;
    for (let run = 0; run < runs.starts.length; run++) {
      for (let row = runs.starts[run]; row + lag < runs.ends[run]; row++) {
        pairs++;
        let square = 0;
        for (let axis = 0; axis < d; axis++) {
          const move = positions[(row + lag) * d + axis] - positions[row * d + axis];
          const { mean, deviation } = displacementScales[lagIndex][axis];
          const z = (move - mean) / deviation;
          let bin = 0;
          while (bin < BIN_EDGES.length && z >= BIN_EDGES[bin]) bin++;
          out[base + axis * DISPLACEMENT_BINS + bin]++;
          square += move * move;
        }
        if (lagIndex === 0) {
          const rate = Math.sqrt(square) / layout.samplingInterval;
          const bin = Math.floor((rate / (SPEED_REACH * layout.speedScale)) * SPEED_BINS);
          out[speed.offset + Math.min(bin, SPEED_BINS - 1)]++;
        }
      }
    }
    for (let i = base; i < base + size; i++) out[i] /= pairs;
    if (lagIndex === 0) for (let bin = 0; bin < SPEED_BINS; bin++) out[speed.offset + bin] /= pairs;
  });
}

function measureLags(layout: FeatureLayout, positions: Float64Array, out: Float64Array): void {
  const { dimensions: d, runs, squareLags, correlationLags, samplingInterval } = layout;
  const squares = findBlock(layout, 'mean-squared-displacement');
  const correlations = findBlock(layout, 'velocity-autocorrelation');
  for (let axis = 0; axis < d; axis++) {
    let square0 = 0;
    squareLags.forEach((lag, index) => {
      let sum = 0;
      let pairs = 0;
      for (let run = 0; run < runs.starts.length; run++) {
        for (let row = runs.starts[run]; row + lag < runs.ends[run]; row++) {
          const move = positions[(row + lag) * d + axis] - positions[row * d + axis];
          sum += move * move;
          pairs++;
        }
      }
      if (squares) out[squares.offset + axis * squareLags.length + index] = sum / pairs;
      if (lag === 1) square0 = sum / pairs / samplingInterval ** 2;
    });
    correlationLags.forEach((lag, index) => {
      let sum = 0;
      let pairs = 0;
      for (let run = 0; run < runs.starts.length; run++) {
        for (let row = runs.starts[run]; row + lag + 1 < runs.ends[run]; row++) {
          const now = positions[(row + 1) * d + axis] - positions[row * d + axis];
          const then = positions[(row + lag + 1) * d + axis] - positions[(row + lag) * d + axis];
          sum += now * then;
          pairs++;
        }
      }
      if (correlations) {
        const value = sum / pairs / samplingInterval ** 2 / square0;
        out[correlations.offset + axis * correlationLags.length + index] = value;
      }
    });
  }
}

/**
 * By place: the mean velocity, its mean square, and the correlation of neighbouring velocities (their products over
 * their squares, which is far sharper than the mean product); and the circulation as a whole.
 */
function measureMaps(layout: FeatureLayout, positions: Float64Array, out: Float64Array): void {
  const { dimensions: d, runs, samplingInterval, cellsPerAxis } = layout;
  const temperature = findBlock(layout, 'kinetic-temperature');
  const persistence = findBlock(layout, 'velocity-persistence');
  const current = findBlock(layout, 'current');
  const circulation = findBlock(layout, 'circulation');
  if (temperature === undefined || current === undefined) return;
  const cells = cellsPerAxis ** d;
  const counts = new Float64Array(cells);
  const pairSquares = new Float64Array(cells);
  const planes = countPlanes(layout.periods);
  const swept = new Float64Array(planes.length);
  let steps = 0;
  for (let run = 0; run < runs.starts.length; run++) {
    for (let row = runs.starts[run]; row + 1 < runs.ends[run]; row++) {
      const cell = cellOf(layout, positions, row);
      counts[cell]++;
      steps++;
      let product = 0;
      let square = 0;
      const hasNext = row + 2 < runs.ends[run];
      for (let axis = 0; axis < d; axis++) {
        const at = row * d + axis;
        const move = (positions[at + d] - positions[at]) / samplingInterval;
        out[temperature.offset + cell] += (move * move) / d;
        out[current.offset + cell * d + axis] += move;
        if (hasNext) {
          const next = (positions[at + 2 * d] - positions[at + d]) / samplingInterval;
          product += move * next;
          square += 0.5 * (move * move + next * next);
        }
      }
      if (hasNext && persistence) {
        out[persistence.offset + cell] += product;
        pairSquares[cell] += square;
      }
      for (let plane = 0; plane < planes.length; plane++) {
        const [a, b] = planes[plane];
        const x = positions[row * d + a] - 0.5 * (layout.low[a] + layout.high[a]);
        const y = positions[row * d + b] - 0.5 * (layout.low[b] + layout.high[b]);
        const dx = positions[(row + 1) * d + a] - positions[row * d + a];
        const dy = positions[(row + 1) * d + b] - positions[row * d + b];
        swept[plane] += (0.5 * (x * dy - y * dx)) / samplingInterval;
      }
    }
  }
  for (let cell = 0; cell < cells; cell++) {
    out[temperature.offset + cell] /= counts[cell];
    for (let axis = 0; axis < d; axis++) out[current.offset + cell * d + axis] /= counts[cell];
    if (persistence) out[persistence.offset + cell] /= pairSquares[cell];
  }
  if (circulation)
    for (let plane = 0; plane < planes.length; plane++)
      out[circulation.offset + plane] = swept[plane] / steps;
}

/** Mean square velocity per axis, from frame to frame, by place along each axis. */
function measureTemperatureCurve(layout: FeatureLayout, positions: Float64Array, out: Float64Array): void {
  const { dimensions: d, runs, samplingInterval, binsPerAxis } = layout;
  const curve = findBlock(layout, 'curve:kinetic-temperature');
  if (curve === undefined) return;
  const counts = new Float64Array(curve.length);
  for (let run = 0; run < runs.starts.length; run++) {
    for (let row = runs.starts[run]; row + 1 < runs.ends[run]; row++) {
      let square = 0;
      for (let axis = 0; axis < d; axis++) {
        square += ((positions[(row + 1) * d + axis] - positions[row * d + axis]) / samplingInterval) ** 2 / d;
      }
      for (let axis = 0; axis < d; axis++) {
        const share = shareOfBox(layout, positions[row * d + axis], axis);
        const bin = axis * binsPerAxis + Math.floor(share * binsPerAxis);
        out[curve.offset + bin] += square;
        counts[bin]++;
      }
    }
  }
  for (let bin = 0; bin < curve.length; bin++) out[curve.offset + bin] /= counts[bin];
}
