/** The curves behind the pictures of a re-simulation. */

import { quantileSorted } from '../numerics/statistics/quantile.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { formatUnit, type Quantity, type Units } from '../units.js';
import type { ResimulationSeries, ResimulationSeriesKind } from './ResimulationResult.js';
import {
  DISPLACEMENT_BINS,
  displacementBinEdges,
  type FeatureLayout,
  findBlock,
  SPEED_BINS,
  speedBinCentres,
} from './featureLayout.js';

/**
 * Turns features into curves: densities of occupancy, speed and displacement, mean squared displacement and velocity
 * correlation by lag.
 *
 * @param features  the recording first, then the replicates
 */
export function drawSeries(
  layout: FeatureLayout,
  features: readonly Float64Array[],
  tracks: TrackSet,
): ResimulationSeries[] {
  const { coordinates, units, samplingInterval } = tracks;
  const series: ResimulationSeries[] = [];
  const add = (
    kind: ResimulationSeriesKind,
    name: string,
    title: string,
    axis: number | null,
    labels: readonly [string, string],
    x: readonly number[],
    offset: number,
    scale: (value: number, index: number) => number,
  ): void => {
    series.push({
      kind,
      name,
      title,
      axis,
      xLabel: labels[0],
      yLabel: labels[1],
      x,
      ...summarize(features, offset, x.length, scale),
    });
  };

  const occupancy = findBlock(layout, 'curve:occupancy');
  coordinates.forEach((coordinate, axis) => {
    if (occupancy === undefined) return;
    const low = layout.low[axis];
    const width =
      (layout.periods[axis] > 0 ? layout.periods[axis] : layout.high[axis] - low) / layout.binsPerAxis;
    const x = Array.from({ length: layout.binsPerAxis }, (_, bin) => low + (bin + 0.5) * width);
    const labels: [string, string] = [label(coordinate, 'position', units), density('length', units)];
    const offset = occupancy.offset + axis * layout.binsPerAxis;
    add(
      'occupancy',
      `occupancy-${coordinate}`,
      `Occupancy along ${coordinate}`,
      axis,
      labels,
      x,
      offset,
      (v) => v / width,
    );
  });

  const temperature = findBlock(layout, 'curve:kinetic-temperature');
  coordinates.forEach((coordinate, axis) => {
    if (temperature === undefined) return;
    const low = layout.low[axis];
    const width =
      (layout.periods[axis] > 0 ? layout.periods[axis] : layout.high[axis] - low) / layout.binsPerAxis;
    const x = Array.from({ length: layout.binsPerAxis }, (_, bin) => low + (bin + 0.5) * width);
    add(
      'kinetic-temperature',
      `kinetic-temperature-${coordinate}`,
      `Kinetic temperature along ${coordinate}, from frame to frame`,
      axis,
      [label(coordinate, 'position', units), label('mean squared velocity', 'temperature', units)],
      x,
      temperature.offset + axis * layout.binsPerAxis,
      same,
    );
  });

  layout.passages?.kinds.forEach(({ name, title }, kind) => {
    const block = findBlock(layout, name);
    const levels = layout.passages?.levels[kind] ?? [];
    if (block === undefined || !(levels[levels.length - 1] > levels[0])) return;
    add(
      name.startsWith('residence') ? 'residence-time' : 'first-passage-time',
      name,
      capitalize(title),
      null,
      [label('time', 'time', units), 'share that lasts longer'],
      levels,
      block.offset + 1,
      same,
    );
  });

  const speed = findBlock(layout, 'curve:speed');
  if (speed !== undefined) {
    const x = speedBinCentres(layout);
    const width = x[1] - x[0];
    const labels: [string, string] = [label('speed', 'velocity', units), density('speed', units)];
    // The last bin also holds all faster steps, so its density means nothing.
    add(
      'speed',
      'speed',
      'Speed from frame to frame',
      null,
      labels,
      x.slice(0, SPEED_BINS - 1),
      speed.offset,
      (v) => v / width,
    );
  }

  layout.displacementLags.forEach((lag, lagIndex) => {
    const block = findBlock(layout, lagIndex === 0 ? 'velocity-distribution' : 'displacement-distribution');
    if (block === undefined) return;
    coordinates.forEach((coordinate, axis) => {
      const edges = displacementBinEdges(layout, lagIndex, axis);
      const row = (Math.max(0, lagIndex - 1) * layout.dimensions + axis) * DISPLACEMENT_BINS;
      const x = edges.slice(1).map((edge, bin) => (edge + edges[bin]) / 2);
      const title = `Displacement along ${coordinate} over ${lag} frame${lag > 1 ? 's' : ''}`;
      const labels: [string, string] = [label('displacement', 'position', units), density('length', units)];
      // The outermost bins reach to infinity and are left out of the picture.
      add(
        'displacement',
        `displacement-${lag}-${coordinate}`,
        title,
        axis,
        labels,
        x,
        block.offset + row + 1,
        (v, bin) => v / (edges[bin + 1] - edges[bin]),
      );
    });
  });

  const time = label('lag', 'time', units);
  const squares = findBlock(layout, 'mean-squared-displacement');
  const correlations = findBlock(layout, 'velocity-autocorrelation');
  coordinates.forEach((coordinate, axis) => {
    if (squares !== undefined) {
      const x = layout.squareLags.map((lag) => lag * samplingInterval);
      const square =
        units.length === null ? 'mean squared displacement' : `mean squared displacement (${units.length}²)`;
      const title = `Mean squared displacement along ${coordinate}`;
      add(
        'mean-squared-displacement',
        `msd-${coordinate}`,
        title,
        axis,
        [time, square],
        x,
        squares.offset + axis * x.length,
        same,
      );
    }
    if (correlations !== undefined) {
      const x = layout.correlationLags.map((lag) => lag * samplingInterval);
      const title = `Velocity autocorrelation along ${coordinate}`;
      const offset = correlations.offset + axis * x.length;
      add(
        'velocity-autocorrelation',
        `vacf-${coordinate}`,
        title,
        axis,
        [time, 'correlation'],
        x,
        offset,
        same,
      );
    }
  });
  return series;
}

function capitalize(text: string): string {
  return text[0].toUpperCase() + text.slice(1);
}

function same(value: number): number {
  return value;
}

function label(word: string, quantity: Quantity, units: Units): string {
  const unit = formatUnit(quantity, units);
  return unit === '' ? word : `${word} (${unit})`;
}

function density(of: 'length' | 'speed', { length, time }: Units): string {
  if (length === null || (of === 'speed' && time === null)) return `share per ${of}`;
  return `share per ${of} (${of === 'speed' ? `${time} ` : ''}${length}⁻¹)`;
}

type Curve = (number | null)[];

function summarize(
  features: readonly Float64Array[],
  offset: number,
  length: number,
  scale: (value: number, index: number) => number,
): { recorded: Curve; low: Curve; median: Curve; high: Curve } {
  const recorded: Curve = [];
  const low: Curve = [];
  const middle: Curve = [];
  const high: Curve = [];
  for (let i = 0; i < length; i++) {
    const own = scale(features[0][offset + i], i);
    recorded.push(Number.isFinite(own) ? own : null);
    const values: number[] = [];
    for (let set = 1; set < features.length; set++) {
      const value = scale(features[set][offset + i], i);
      if (Number.isFinite(value)) values.push(value);
    }
    const sorted = Float64Array.from(values).sort();
    const at = (share: number): number | null => (sorted.length > 0 ? quantileSorted(sorted, share) : null);
    low.push(at(0.025));
    middle.push(at(0.5));
    high.push(at(0.975));
  }
  return { recorded, low, median: middle, high };
}
