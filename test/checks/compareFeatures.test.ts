import { describe, expect, it } from 'vitest';
import { compareFeatures } from '../../src/checks/compareFeatures.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

const BLOCKS = [
  { name: 'a', offset: 0, length: 1 },
  { name: 'b', offset: 1, length: 5 },
  { name: 'c', offset: 6, length: 20 },
];

function drawSets(seed: number, count: number, shift: (index: number) => number): Float64Array[] {
  const stream = randomStream(seed, 'sets');
  return Array.from({ length: count }, (_, set) => {
    const common = stream.normal(); // what the statistics have in common must not spoil the joint p-value
    return Float64Array.from(
      { length: 26 },
      (_v, i) => common + Math.exp(stream.normal()) + (set === 0 ? shift(i) : 0),
    );
  });
}

describe('a recording like its simulations', () => {
  it('has p-values as a uniform law on 1/20 … 1 says', () => {
    const studies = 2000;
    let [joint, single, mean] = [0, 0, 0];
    for (let seed = 0; seed < studies; seed++) {
      const { p, statistics } = compareFeatures(
        drawSets(seed, 20, () => 0),
        BLOCKS,
      );
      if (p <= 0.05) joint++;
      if (statistics[0].p <= 0.05) single++;
      mean += p / studies;
    }
    const bound = 4 * Math.sqrt((0.05 * 0.95) / studies);
    expect(Math.abs(joint / studies - 0.05)).toBeLessThan(bound);
    expect(Math.abs(single / studies - 0.05)).toBeLessThan(bound);
    expect(Math.abs(mean - 10.5 / 20)).toBeLessThan((4 * 0.29) / Math.sqrt(studies));
  });
});

describe('a recording unlike its simulations', () => {
  it('is found in the block where it differs, and the correction never lowers a p-value', () => {
    const { p, statistics } = compareFeatures(
      drawSets(1, 100, (i) => (i >= 6 ? 12 : 0)),
      BLOCKS,
    );
    expect(p).toBeCloseTo(0.01, 10);
    expect(statistics.map(({ name, p: own }) => [name, own <= 0.05])).toContainEqual(['c', true]);
    for (const statistic of statistics) expect(statistic.adjusted).toBeGreaterThanOrEqual(statistic.p - 0.05);
    expect(Math.min(...statistics.map(({ adjusted }) => adjusted))).toBeCloseTo(p, 10);
    expect(statistics[2].recorded).toBeGreaterThan(statistics[2].high);
  });
});

it('ignores numbers that are missing or the same in every data set', () => {
  const sets = drawSets(2, 20, () => 0);
  const plain = compareFeatures(sets, BLOCKS);
  const blanked = sets.map((set) => {
    const copy = Float64Array.from([...set, Number.NaN, 7]);
    return copy;
  });
  const blocks = [...BLOCKS.slice(0, 2), { name: 'c', offset: 6, length: 22 }];
  expect(compareFeatures(blanked, blocks)).toEqual(plain);
});
