/**
 * Numbers that describe a recording: histograms, means by place and means by lag. The same list of numbers is taken
 * from the recording and from every simulated one, in one flat array; a layout says which stretch means what.
 */

import { findRuns, type Runs } from '../tracks/runs.js';
import type { TrackSet } from '../tracks/TrackSet.js';

/** A stretch of the flat array. */
export interface FeatureBlock {
  readonly name: string;
  readonly offset: number;
  readonly length: number;
}

export interface FeatureLayout {
  readonly dimensions: number;
  readonly samplingInterval: number;
  readonly periods: readonly number[];
  readonly runs: Runs;
  /** Visited box; cells of the maps divide it evenly, places beyond it belong to the nearest cell. */
  readonly low: readonly number[];
  readonly high: readonly number[];
  readonly cellsPerAxis: number;
  /** Bins of the marginal occupancy curves. */
  readonly binsPerAxis: number;
  /** Lags in frames of displacement histograms, mean squared displacements and velocity correlations. */
  readonly displacementLags: readonly number[];
  readonly squareLags: readonly number[];
  readonly correlationLags: readonly number[];
  /** Mean and standard deviation of the displacements per lag and axis, which set the bins. */
  readonly displacementScales: readonly (readonly { readonly mean: number; readonly deviation: number }[])[];
  /** Root mean square speed, which sets the bins of the speed curve. */
  readonly speedScale: number;
  readonly blocks: readonly FeatureBlock[];
  readonly length: number;
}

/** Upper edges of the inner bins in standard deviations: eight bins a normal variable fills alike, and two tails. */
const BIN_EDGES = [-2, -1.15, -0.674, -0.319, 0, 0.319, 0.674, 1.15, 2];
export const DISPLACEMENT_BINS = BIN_EDGES.length + 1;
export const SPEED_BINS = 24;
const SPEED_REACH = 3; // of the root mean square speed
const CELLS = [16, 7, 4]; // per axis, by dimension: some fifty places
const MAX_SQUARE_LAGS = 8;
const MAX_CORRELATION_LAG = 24;

/** Plans the features of a recording of a model of the given order. */
export function planFeatures(
  tracks: TrackSet,
  low: readonly number[],
  high: readonly number[],
): FeatureLayout {
  const d = tracks.dimensions;
  const runs = findRuns(tracks);
  const longest = longestUsefulLag(runs);
  const squareLags: number[] = [];
  for (let lag = 1; lag <= longest && squareLags.length < MAX_SQUARE_LAGS; lag *= 2) squareLags.push(lag);
  const correlationLags = Array.from(
    { length: Math.max(0, Math.min(MAX_CORRELATION_LAG, longest - 1)) },
    (_, index) => index + 1,
  ).filter((lag) => lag <= 6 || lag % 3 === 0);
  const displacementLags = [...new Set([squareLags[0], squareLags[2], squareLags[4]])].filter(
    (lag): lag is number => lag !== undefined,
  );
  const displacementScales = displacementLags.map((lag) => measureDisplacements(tracks, runs, lag));
  let square = 0;
  for (const { mean, deviation } of displacementScales[0] ?? [])
    square += mean * mean + deviation * deviation;
  const cellsPerAxis = CELLS[d - 1];
  const cells = cellsPerAxis ** d;
  const binsPerAxis = 24;
  const blocks: FeatureBlock[] = [];
  let length = 0;
  const add = (name: string, size: number): void => {
    if (size > 0) blocks.push({ name, offset: length, length: size });
    length += size;
  };
  add('occupancy', cells);
  if (displacementLags.length > 0) add('velocity-distribution', d * DISPLACEMENT_BINS);
  add('displacement-distribution', Math.max(0, displacementLags.length - 1) * d * DISPLACEMENT_BINS);
  add('mean-squared-displacement', squareLags.length * d);
  add('velocity-autocorrelation', correlationLags.length * d);
  if (squareLags.length > 0) add('kinetic-temperature', cells);
  if (correlationLags.length > 0) add('velocity-persistence', cells);
  if (squareLags.length > 0) add('current', cells * d);
  if (squareLags.length > 0) add('circulation', countPlanes(tracks.periods).length);
  add('curve:occupancy', binsPerAxis * d);
  add('curve:speed', displacementLags.length > 0 ? SPEED_BINS : 0);
  return {
    dimensions: d,
    samplingInterval: tracks.samplingInterval,
    periods: tracks.periods,
    runs,
    low,
    high,
    cellsPerAxis,
    binsPerAxis,
    displacementLags,
    squareLags,
    correlationLags,
    displacementScales,
    speedScale: Math.sqrt(square) / tracks.samplingInterval || 1,
    blocks,
    length,
  };
}

/** A block by name; undefined where the recording cannot carry it. */
export function findBlock(layout: FeatureLayout, name: string): FeatureBlock | undefined {
  return layout.blocks.find((block) => block.name === name);
}

/** Centres of the speed curve's bins, length/time. */
export function speedBinCentres(layout: FeatureLayout): number[] {
  const width = (SPEED_REACH * layout.speedScale) / SPEED_BINS;
  return Array.from({ length: SPEED_BINS }, (_, bin) => (bin + 0.5) * width);
}

/** Edges between the bins of a displacement histogram, length. */
export function displacementBinEdges(layout: FeatureLayout, lagIndex: number, axis: number): number[] {
  const { mean, deviation } = layout.displacementScales[lagIndex][axis];
  return BIN_EDGES.map((edge) => mean + edge * deviation);
}

/** The longest lag that a quarter of the steps can still carry, in frames. */
function longestUsefulLag({ starts, ends }: Runs): number {
  let steps = 0;
  let longest = 0;
  for (let run = 0; run < starts.length; run++) {
    steps += ends[run] - starts[run] - 1;
    longest = Math.max(longest, ends[run] - starts[run] - 1);
  }
  let lag = longest;
  const carried = (candidate: number): number => {
    let pairs = 0;
    for (let run = 0; run < starts.length; run++) pairs += Math.max(0, ends[run] - starts[run] - candidate);
    return pairs;
  };
  while (lag > 1 && carried(lag) < Math.max(20, 0.25 * steps)) lag = Math.floor(lag * 0.8);
  return steps > 0 ? Math.max(1, lag) : 0;
}

function measureDisplacements(
  tracks: TrackSet,
  runs: Runs,
  lag: number,
): { mean: number; deviation: number }[] {
  const d = tracks.dimensions;
  const { positions } = tracks;
  return Array.from({ length: d }, (_, axis) => {
    let count = 0;
    let sum = 0;
    let square = 0;
    for (let run = 0; run < runs.starts.length; run++) {
      for (let row = runs.starts[run]; row + lag < runs.ends[run]; row++) {
        const move = positions[(row + lag) * d + axis] - positions[row * d + axis];
        count++;
        sum += move;
        square += move * move;
      }
    }
    const mean = sum / count;
    return { mean, deviation: Math.sqrt(Math.max(0, square / count - mean * mean)) || Number.MIN_VALUE };
  });
}

/** Pairs of open axes, in which circulation makes sense. */
function countPlanes(periods: readonly number[]): [number, number][] {
  const planes: [number, number][] = [];
  for (let a = 0; a < periods.length; a++) {
    for (let b = a + 1; b < periods.length; b++)
      if (periods[a] === 0 && periods[b] === 0) planes.push([a, b]);
  }
  return planes;
}

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
