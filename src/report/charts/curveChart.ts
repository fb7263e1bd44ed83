/**
 * A coefficient along a line: its value, the pointwise interval, the simultaneous band around it, and hatching where
 * the recording has no say.
 */

import { axisExponent } from '../format.js';
import type { Chart, Drawing } from './Drawing.js';
import { findRange, formatTick } from './ticks.js';

export interface Curve {
  /** Place along the line; increasing. */
  readonly x: ArrayLike<number>;
  readonly value: ArrayLike<number>;
  readonly low: ArrayLike<number>;
  readonly high: ArrayLike<number>;
  readonly bandLow: ArrayLike<number>;
  readonly bandHigh: ArrayLike<number>;
  /** 1 inside the visited region. */
  readonly visited: ArrayLike<number>;
}

export interface CurveOptions {
  readonly width: number;
  readonly height: number;
  /** Axis label for a power of ten taken out of the numbers. */
  readonly xLabel: (exponent: number) => string;
  readonly yLabel: (exponent: number) => string;
  /** Vertical range to use, in units of the values; chosen from the curve where left out. */
  readonly range?: readonly [number, number];
  /** What is said at place `i`. */
  readonly describe: (index: number) => string;
}

interface Row {
  x: number;
  value: number;
  low: number;
  high: number;
  bandLow: number;
  bandHigh: number;
  /** Stretches of visited or unvisited places, numbered, so that lines break between them. */
  stretch: number;
  visited: boolean;
}

function gatherRows(curve: Curve, xFactor: number, yFactor: number): Row[] {
  const rows: Row[] = [];
  let stretch = 0;
  for (let i = 0; i < curve.x.length; i++) {
    const visited = curve.visited[i] === 1;
    const before = rows[rows.length - 1];
    if (before && before.visited !== visited) stretch++;
    const at = (values: ArrayLike<number>) => (values[i] ?? Number.NaN) * yFactor;
    rows.push({
      x: (curve.x[i] ?? 0) * xFactor,
      value: at(curve.value),
      low: at(curve.low),
      high: at(curve.high),
      bandLow: at(curve.bandLow),
      bandHigh: at(curve.bandHigh),
      stretch,
      visited,
    });
  }
  return rows;
}

/** Height of the picture over that of the wide band, where the course is flat. */
const ROOM_AROUND_BAND = 2.5;

/**
 * The vertical range: the values and pointwise intervals of visited places, except that intervals may not stretch
 * it beyond twice what the values and the typical interval need (a band may leave the picture at a poor end).
 */
export function chooseRange(curve: Curve): [number, number] {
  const rows = gatherRows(curve, 1, 1);
  const known = rows.filter((row) => row.visited);
  const shown = known.length > 0 ? known : rows;
  const values = findRange(shown.map((row) => row.value)) ?? { low: 0, high: 1 };
  const halves = shown.map((row) => (row.high - row.low) / 2).filter(Number.isFinite);
  halves.sort((a, b) => a - b);
  const typical = halves[Math.floor(halves.length / 2)] ?? 0;
  const reach = Math.max(values.high - values.low, 4 * typical, Math.abs(values.high) * 0.02);
  const ends = findRange(shown.flatMap((row) => [row.bandLow, row.bandHigh])) ?? values;
  let low = Math.max(ends.low, values.low - 0.75 * reach);
  let high = Math.min(ends.high, values.high + 0.75 * reach);
  if (high <= low) {
    const room = Math.abs(high) || 1;
    [low, high] = [low - room, high + room];
  }
  // A course that is flat against its band gets room around it: a picture filled by its band shows neither.
  const bands = shown.map((row) => row.bandHigh - row.bandLow).filter(Number.isFinite);
  bands.sort((a, b) => a - b);
  const lacking = ROOM_AROUND_BAND * (bands[Math.floor(bands.length / 2)] ?? 0) - (high - low);
  if (values.high - values.low < (bands[0] ?? 0) && lacking > 0) {
    [low, high] = [low - lacking / 2, high + lacking / 2];
  }
  // Zero is worth seeing where it is near.
  if (low > 0 && low < 0.5 * high) low = 0;
  if (high < 0 && high > 0.5 * low) high = 0;
  return [low, high];
}

export function drawCurve(drawing: Drawing, curve: Curve, options: CurveOptions): Chart {
  const { Plot } = drawing;
  const xExponent = axisExponent(curve.x);
  const known = Array.from(curve.value).filter((_, i) => curve.visited[i] === 1);
  const yExponent = axisExponent(options.range ?? (known.length > 0 ? known : curve.value));
  const rows = gatherRows(curve, 10 ** -xExponent, 10 ** -yExponent);
  const range = options.range ?? chooseRange(curve);
  const domain = [range[0] * 10 ** -yExponent, range[1] * 10 ** -yExponent] as const;
  const first = rows[0]?.x ?? 0;
  const last = rows[rows.length - 1]?.x ?? 1;
  const half = rows.length > 1 ? (last - first) / (rows.length - 1) / 2 : 0;
  const unvisited: { x1: number; x2: number }[] = [];
  rows.forEach((row, i) => {
    if (row.visited) return;
    const open = unvisited[unvisited.length - 1];
    const x2 = Math.min(last, row.x + half);
    if (open && rows[i - 1]?.visited === false) open.x2 = x2;
    else unvisited.push({ x1: Math.max(first, row.x - half), x2 });
  });
  const visited = rows.filter((row) => row.visited);
  const ticks = options.height < 200 ? 3 : 5;
  const drawn = drawing.draw({
    width: options.width,
    height: options.height,
    marginLeft: 52,
    marginBottom: 40,
    marginTop: 30,
    marginRight: 16,
    x: {
      label: options.xLabel(xExponent),
      labelAnchor: 'right',
      labelArrow: 'none',
      tickFormat: formatTick,
      ticks: options.width / 80,
    },
    y: {
      label: options.yLabel(yExponent),
      labelArrow: 'none',
      tickFormat: formatTick,
      domain: [...domain],
      nice: true,
      ticks,
      tickSize: 0,
    },
    marks: [
      Plot.gridY({ stroke: 'var(--rule)', strokeOpacity: 1, ticks }),
      Plot.rectY(unvisited, {
        x1: 'x1',
        x2: 'x2',
        y1: domain[0],
        y2: domain[1],
        fill: 'url(#hatch)',
        clip: true,
      }),
      Plot.areaY(visited, {
        x: 'x',
        y1: 'bandLow',
        y2: 'bandHigh',
        z: 'stretch',
        fill: 'var(--band-wide)',
        clip: true,
      }),
      Plot.areaY(visited, { x: 'x', y1: 'low', y2: 'high', z: 'stretch', fill: 'var(--band)', clip: true }),
      domain[0] < 0 && domain[1] > 0 ? Plot.ruleY([0], { stroke: 'var(--muted)', strokeWidth: 0.75 }) : null,
      Plot.lineY(
        rows.filter((row) => !row.visited),
        {
          x: 'x',
          y: 'value',
          z: 'stretch',
          stroke: 'var(--muted)',
          strokeWidth: 1.25,
          strokeDasharray: '2 4',
          clip: true,
        },
      ),
      Plot.lineY(visited, {
        x: 'x',
        y: 'value',
        z: 'stretch',
        stroke: 'var(--line)',
        strokeWidth: 2.25,
        clip: true,
      }),
    ],
  });
  const [bottom, top] = [drawn.y(domain[0]), drawn.y(domain[1])];
  const probes = rows.map((row, index) => {
    const y = drawn.y(row.value);
    const inside = Number.isFinite(y) ? Math.min(bottom, Math.max(top, y)) : bottom;
    return [Math.round(drawn.x(row.x)), Math.round(inside), options.describe(index)] as const;
  });
  return { svg: drawn.svg, probes };
}
