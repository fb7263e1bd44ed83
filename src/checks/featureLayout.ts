/**
 * Which numbers describe a recording: histograms, means by place and means by lag. The same list of numbers is taken
 * from the recording and from every simulated one, in one flat array; a layout says which stretch means what.
 */

import { findRuns, type Runs } from '../tracks/runs.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { PASSAGE_FEATURES, type PassagePlan, planPassages } from './passages.js';
import type { Region } from './Region.js';

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
  /** Residence and first-passage times; null where no region was given. */
  readonly passages: PassagePlan | null;
  readonly blocks: readonly FeatureBlock[];
  readonly length: number;
}

/** Upper edges of the inner bins in standard deviations: eight bins a normal variable fills alike, and two tails. */
export const BIN_EDGES = [-2, -1.15, -0.674, -0.319, 0, 0.319, 0.674, 1.15, 2];
export const DISPLACEMENT_BINS = BIN_EDGES.length + 1;
export const SPEED_BINS = 24;
export const SPEED_REACH = 3; // of the root mean square speed
const CELLS = [16, 7, 4]; // per axis, by dimension: some fifty places
const MAX_SQUARE_LAGS = 8;
const MAX_CORRELATION_LAG = 24;

/**
 * Plans the features of a recording.
 *
 * @param low  lower corner of the visited box
 * @param high  upper corner
 * @param regions  where residence and first-passage times are taken
 */
export function planFeatures(
  tracks: TrackSet,
  low: readonly number[],
  high: readonly number[],
  regions: readonly Region[] = [],
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
  const passages = regions.length > 0 ? planPassages(tracks, regions) : null;
  for (const { name } of passages?.kinds ?? []) add(name, PASSAGE_FEATURES);
  add('curve:occupancy', binsPerAxis * d);
  if (squareLags.length > 0) add('curve:kinetic-temperature', binsPerAxis * d);
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
    passages,
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
export function countPlanes(periods: readonly number[]): [number, number][] {
  const planes: [number, number][] = [];
  for (let a = 0; a < periods.length; a++) {
    for (let b = a + 1; b < periods.length; b++)
      if (periods[a] === 0 && periods[b] === 0) planes.push([a, b]);
  }
  return planes;
}
