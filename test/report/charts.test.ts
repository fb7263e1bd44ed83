/** Pictures against the numbers they are drawn from. */

import { parseHTML } from 'linkedom';
import { beforeAll, describe, expect, test } from 'vitest';
import { drawArrows } from '../../src/report/charts/arrowChart.js';
import { chooseRange, drawCurve } from '../../src/report/charts/curveChart.js';
import { type Chart, type Drawing, openDrawing } from '../../src/report/charts/Drawing.js';
import { drawGaugeLine } from '../../src/report/charts/gaugeLine.js';
import { drawMap, MAP_MARGINS, type PlaneGrid, spreadColours } from '../../src/report/charts/mapChart.js';
import { drawSeries } from '../../src/report/charts/seriesChart.js';
import { drawSparkline } from '../../src/report/charts/sparkline.js';
import { drawVisits } from '../../src/report/charts/visitChart.js';
import { exampleResimulation } from '../pages/pageResults.js';

let drawing: Drawing;
beforeAll(async () => {
  drawing = await openDrawing();
});

/** Elements of a picture that fit a selector, with their attributes. */
function find(chart: Chart, selector: string): { get(name: string): string; parent: string }[] {
  const { document } = parseHTML(`<!doctype html><body>${chart.svg}</body>`);
  return [...document.querySelectorAll(selector)].map((element) => ({
    get: (name) => element.getAttribute(name) ?? element.parentElement?.getAttribute(name) ?? '',
    parent: element.parentElement?.outerHTML ?? '',
  }));
}

/** Points of a path in drawing units. */
const points = (path: string) =>
  path
    .split(/[MLZ]/)
    .filter(Boolean)
    .map((pair) => pair.split(',').map(Number));

const label = (exponent: number) => `name (10^${exponent})`;

describe('a curve', () => {
  const x = Float64Array.from({ length: 41 }, (_, i) => i / 10);
  const value = x.map((place) => 2e-7 * Math.sin(place));
  const visited = x.map((place) => (place < 3 ? 1 : 0));
  const shift = (by: number) => value.map((number) => number + by);
  const curve = {
    x,
    value,
    low: shift(-3e-8),
    high: shift(3e-8),
    bandLow: shift(-6e-8),
    bandHigh: shift(6e-8),
    visited,
  };
  const draw = () =>
    drawCurve(drawing, curve, {
      width: 400,
      height: 300,
      xLabel: label,
      yLabel: label,
      describe: (i) => `place ${i}`,
    });

  test('goes through the values: linear between frame and data, solid where visited, dotted elsewhere', () => {
    const chart = draw();
    const [line] = find(chart, 'path').filter((path) => path.get('stroke') === 'var(--line)');
    const drawn = points(line.get('d'));
    expect(drawn).toHaveLength(30);
    // x from 52 to 384 over 0 … 4; y is affine in the value: two points give the scale, the others must follow
    drawn.forEach(([px], i) => expect(px).toBeCloseTo(52 + (332 * x[i]) / 4, 1));
    const slope = (drawn[15][1] - drawn[0][1]) / (value[15] - value[0]);
    expect(slope).toBeLessThan(0);
    drawn.forEach(([, py], i) =>
      expect(Math.abs(py - (drawn[0][1] + slope * (value[i] - value[0])))).toBeLessThan(0.05),
    );
    const dotted = find(chart, 'path').filter((path) => path.get('stroke-dasharray') !== '');
    expect(points(dotted[0].get('d'))).toHaveLength(11);
  });

  test('has both bands around it, in the right order', () => {
    const chart = draw();
    const area = (fill: string) =>
      points(
        find(chart, 'path')
          .filter((path) => path.get('fill') === fill)[0]
          .get('d'),
      );
    const [wide, narrow] = [area('var(--band-wide)'), area('var(--band)')];
    const spread = (band: number[][]) => {
      const at = band.filter(([px]) => Math.abs(px - 52) < 0.1).map(([, py]) => py);
      return Math.max(...at) - Math.min(...at);
    };
    expect(spread(wide) / spread(narrow)).toBeCloseTo(2, 1);
  });

  test('takes the power of ten out of its axis, and hatches what was not visited', () => {
    const chart = draw();
    expect(chart.svg).toContain('name (10^-7)');
    const hatched = find(chart, 'rect').filter((rect) => rect.get('fill') === 'url(#hatch)');
    expect(hatched).toHaveLength(1);
    // half a step before x = 3 of 0 … 4
    expect(Number(hatched[0].get('x'))).toBeCloseTo(52 + (332 * 2.95) / 4, 1);
  });

  test('says the value of every place, where its point is', () => {
    const { probes } = draw();
    expect(probes.map(([, , text]) => text)).toEqual(Array.from(x, (_, i) => `place ${i}`));
    probes.forEach(([px], i) => expect(Math.abs(px - (52 + (332 * x[i]) / 4))).toBeLessThanOrEqual(0.51));
  });

  test('is not flattened by an interval that is wide at a poor end', () => {
    const wide = curve.high.map((number, i) => (i === 0 ? 1 : number));
    const [low, high] = chooseRange({ ...curve, high: wide, bandHigh: wide });
    expect(high).toBeLessThan(6e-7);
    expect(low).toBeLessThan(-3e-8);
  });

  test('keeps room around its band where its course is flat', () => {
    const all = (value: number) => curve.x.map(() => value);
    const flat = { ...curve, value: all(412), low: all(401), high: all(423) };
    const [low, high] = chooseRange({ ...flat, bandLow: all(397), bandHigh: all(427) });
    expect(high - low).toBeGreaterThan(2 * (427 - 397));
    expect((low + high) / 2).toBeCloseTo(412, 6);
  });

  test('is drawn alike every time', () => {
    expect(draw().svg.replace(/clip-\d+/g, '')).toBe(draw().svg.replace(/clip-\d+/g, ''));
  });
});

/** Two by three cells; the last one was not visited. */
const GRID: PlaneGrid = {
  low: [0, 0],
  high: [2, 3],
  cells: [2, 3],
  visited: [1, 1, 1, 1, 1, 0],
};

describe('a map', () => {
  const values = [0, 1, 2, 3, 4, 5];
  const draw = () =>
    drawMap(drawing, GRID, {
      width: 260,
      xLabel: label,
      yLabel: label,
      colours: values.map((i) => `var(--c${i})`),
      classOf: (i) => values[i],
      uncertainty: (i) => (i === 1 ? 2 : i === 3 ? 1 : 0),
      describe: (i) => `cell ${i}`,
    });

  test('puts every cell in its place: first axis to the right, second upwards', () => {
    const chart = draw();
    const inner = 260 - MAP_MARGINS.marginLeft - MAP_MARGINS.marginRight;
    for (const [i, column, row] of [
      [0, 0, 0],
      [1, 0, 1],
      [2, 0, 2],
      [3, 1, 0],
      [4, 1, 1],
    ]) {
      const [cell] = find(chart, 'rect').filter((rect) => rect.get('fill') === `var(--c${i})`);
      // cells overlap by 0.2 units, so that no gap shows between them
      expect(Number(cell.get('x'))).toBeCloseTo(MAP_MARGINS.marginLeft + (inner / 2) * column - 0.2, 1);
      const height = Number(/viewBox="0 0 260 (\d+)"/.exec(chart.svg)?.[1]);
      const tall = height - MAP_MARGINS.marginTop - MAP_MARGINS.marginBottom;
      expect(Number(cell.get('y'))).toBeCloseTo(MAP_MARGINS.marginTop + (tall / 3) * (2 - row) - 0.2, 1);
    }
    expect(find(chart, 'rect').filter((rect) => rect.get('fill') === 'var(--c5)')).toHaveLength(0);
  });

  test('hatches what was not visited and stripes what is uncertain', () => {
    const fills = find(draw(), 'rect').map((rect) => rect.get('fill'));
    for (const fill of ['url(#hatch)', 'url(#veil)', 'url(#veil-light)'])
      expect(fills.filter((found) => found === fill)).toHaveLength(1);
  });

  test('says the value of visited cells alone', () => {
    expect(draw().probes.map(([, , text]) => text)).toEqual([0, 1, 2, 3, 4].map((i) => `cell ${i}`));
  });

  test('spreads few classes over the whole scale', () => {
    expect(spreadColours(2)).toEqual(['var(--value-0)', 'var(--value-6)']);
    expect(spreadColours(1)).toEqual(['var(--value-3)']);
    expect(spreadColours(7)).toHaveLength(7);
  });
});

describe('arrows', () => {
  const draw = (along: number[], across: number[], distinct = true) =>
    drawArrows(drawing, GRID, {
      width: 260,
      xLabel: label,
      yLabel: label,
      along,
      across,
      distinct: () => distinct,
      describe: (i) => `cell ${i}`,
      formatLength: (length) => `${length} <m>`,
    });
  /** Direction of an arrow, from the turn of its mark: 0 to the right, 90 upwards. */
  const directions = (chart: Chart, stroke: string) =>
    find(chart, 'path')
      .filter((path) => path.get('stroke') === stroke && path.get('transform').includes('translate'))
      .map((path) => 90 - Number(/rotate\((-?[\d.]+)/.exec(path.get('transform'))?.[1] ?? 0));

  test('point where the vector points, on the screen', () => {
    const east = directions(draw([1, 1, 1, 1, 1, 1], [0, 0, 0, 0, 0, 0]), 'var(--line)');
    expect(east).toEqual([0, 0, 0, 0, 0]);
    const north = directions(draw([0, 0, 0, 0, 0, 0], [2, 2, 2, 2, 2, 2]), 'var(--line)');
    expect(north).toEqual([90, 90, 90, 90, 90]);
    // the picture of 2 by 3 is true to scale up to 1.3 : 1, so that 45° is squeezed to atan(1.3 · 2/3)
    const [squeezed] = directions(draw([1, 1, 1, 1, 1, 1], [1, 1, 1, 1, 1, 1]), 'var(--line)');
    expect(squeezed).toBeCloseTo((Math.atan((1.3 * 2) / 3) * 180) / Math.PI, 0);
  });

  test('are faint where the vector could be zero', () => {
    const chart = draw([1, 1, 1, 1, 1, 1], [0, 0, 0, 0, 0, 0], false);
    expect(directions(chart, 'var(--line)')).toHaveLength(0);
    expect(directions(chart, 'var(--muted)')).toHaveLength(5);
  });

  test('have a key whose text is text', () => {
    expect(draw([1, 1, 1, 1, 1, 1], [0, 0, 0, 0, 0, 0]).svg).toContain('&lt;m&gt;');
  });
});

describe('bars of visits', () => {
  test('are as high as the counts, on hatched ground where they are too few', () => {
    const counts = [10, 40, 20, 1];
    const chart = drawVisits(
      drawing,
      { low: 0, high: 4, counts, threshold: 5 },
      { width: 300, height: 200, xLabel: label, yLabel: label, describe: (i) => `${counts[i]}` },
    );
    const bars = find(chart, 'rect').filter((rect) => /--(bar|rare)/.test(rect.get('fill')));
    const heights = bars.map((bar) => Number(bar.get('height')));
    heights.forEach((height, i) => expect(height / heights[1]).toBeCloseTo(counts[i] / 40, 1));
    expect(find(chart, 'rect').filter((rect) => rect.get('fill') === 'url(#hatch)')).toHaveLength(1);
    expect(chart.probes.map(([, , text]) => Number(text))).toEqual(counts);
  });
});

describe('a series of the re-simulation', () => {
  test('draws the recording, says it beside the simulated range, and overlooks empty bins', () => {
    const [series] = exampleResimulation().series;
    const recorded = series.recorded.map((value, i) => (i === 3 ? null : value));
    const chart = drawSeries(drawing, { ...series, recorded }, { width: 380, height: 240 });
    const dots = find(chart, 'circle');
    expect(dots).toHaveLength(recorded.length - 1);
    expect(chart.probes).toHaveLength(recorded.length);
    expect(chart.probes[3][2]).toMatch(/recorded none, re-simulated/);
    expect(chart.svg).toContain('share of positions');
  });

  test('puts a power of ten into the brackets of its labels', () => {
    const [series] = exampleResimulation().series;
    const tiny = { ...series, x: series.x.map((x) => x * 1e-6) };
    expect(drawSeries(drawing, tiny, { width: 380, height: 240 }).svg).toContain('x (10⁻⁶ m)');
  });
});

describe('lines of text', () => {
  test('a sparkline rises with the values, is flat for a constant, and marks what is not shown', () => {
    expect(drawSparkline([0, 1, 2, 7], [1, 1, 1, 1])).toBe('▁▂▃█');
    expect(drawSparkline([5, 5.001, 5], [1, 1, 1])).toBe('▄▄▄');
    expect(drawSparkline([1, Number.NaN, 3], [1, 1, 0])).toBe('▄··');
  });

  test('a gauge has the dot where the value is among the simulated ones', () => {
    expect(drawGaugeLine(5, 0, 10, 21)).toBe('·····├────●────┤·····');
    expect(drawGaugeLine(0, 0, 10, 21)).toBe('·····●─────────┤·····');
    expect(drawGaugeLine(-100, 0, 10, 21)).toMatch(/^●·+├─*┤·*$/);
    expect(drawGaugeLine(Number.NaN, 0, 1, 9)).toBe(' '.repeat(9));
    for (const value of [-1e9, 0, 3, 1e12]) expect(drawGaugeLine(value, 0, 10, 15)).toHaveLength(15);
    expect(drawGaugeLine(4, 4, 4, 15)).toContain('●');
  });
});
