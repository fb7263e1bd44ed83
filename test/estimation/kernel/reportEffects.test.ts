import { describe, expect, it } from 'vitest';
import { MomentCollector } from '../../../src/estimation/kernel/BinnedMoments.js';
import { measureShares } from '../../../src/estimation/kernel/fewBlocks.js';
import { createFieldSmoother } from '../../../src/estimation/kernel/fieldSmoother.js';
import { createKernelGrid } from '../../../src/estimation/kernel/grid.js';
import { noiseField } from '../../../src/estimation/kernel/localFields.js';
import { createKnotWeights } from '../../../src/estimation/kernel/motionMoments.js';
import { reportEffects } from '../../../src/estimation/kernel/reportEffects.js';
import { solveFields } from '../../../src/estimation/kernel/solveFields.js';
import { createWindows } from '../../../src/estimation/kernel/windows.js';
import { randomStream } from '../../../src/numerics/random/RandomStream.js';
import { describeVisited } from '../../../src/tracks/visitedRegion.js';
import { makeTrack, makeTracks } from '../../support/makeTracks.js';

const BLOCKS = 40;
const ROWS = 4000;

/** Rows spread evenly over 0 … 1, of uniform variance. */
function prepare(bandwidth: number) {
  const places = Array.from({ length: ROWS }, (_, i) => i / (ROWS - 1));
  const tracks = makeTracks([makeTrack(places)]);
  const grid = createKernelGrid(tracks, describeVisited(tracks));
  const collector = new MomentCollector(grid.size, 1, 1, 1);
  const at = createKnotWeights(grid);
  for (const place of places) {
    at.count = grid.basis.evaluateInto([place], 0, at.indices, at.values);
    collector.add(0, at, at, Float64Array.of(1), Float64Array.of(1), Float64Array.of(0));
  }
  const moments = collector.finish();
  const windows = createWindows(grid, moments.counts, [0.1]);
  const smoother = createFieldSmoother(moments, noiseField('noise', true, 1), grid, windows, [bandwidth]);
  const counts = Array.from({ length: BLOCKS }, () => moments.counts.map((count) => count / BLOCKS));
  return { grid, moments, windows, smoother, counts };
}

describe('standard deviations as they are reported', () => {
  // A wide window: the standard deviation of the line at the edge is well above that in the middle.
  const bandwidth = 0.4;
  const { grid, moments, windows, smoother, counts } = prepare(bandwidth);
  const { designDeviations } = measureShares(grid, windows, [bandwidth], counts);

  it('know from the design how they rise towards the edge', () => {
    const middle = (grid.size - 1) / 2;
    expect(designDeviations[0] / designDeviations[middle]).toBeGreaterThan(2);
    // Four smoothings with a window this wide come close to a polynomial of high degree; no estimate is better than a mean.
    expect(designDeviations[middle]).toBeGreaterThan(1 / Math.sqrt(ROWS));
  });

  it('follow the design, and scatter less than the blocks in each window', () => {
    let steadied = 0;
    let plain = 0;
    const STUDIES = 20;
    for (let study = 0; study < STUDIES; study++) {
      const stream = randomStream(study + 1, 'effects', 0);
      const influences = new Float64Array(BLOCKS * grid.size);
      counts.forEach((own, block) => {
        const vector = own.map((count) => Math.sqrt(count) * stream.normal());
        influences.set(solveFields(moments, [smoother], vector).values[0], block * grid.size);
      });
      const effects = reportEffects(
        [{ components: 1, bandwidth: [bandwidth] }],
        influences,
        grid,
        windows,
        counts,
      );
      for (let knot = 0; knot < grid.size; knot++) {
        let [sum, square] = [0, 0];
        for (let block = 0; block < BLOCKS; block++) {
          square += effects[block * grid.size + knot] ** 2;
          sum += influences[block * grid.size + knot] ** 2;
        }
        const leverage = 1 / (1 - 1 / BLOCKS);
        const ratio = Math.sqrt(square) / leverage / designDeviations[knot];
        // The deviation of forty normal numbers is known to 1/√80 = 11 %; three and a half of these.
        expect(Math.abs(ratio - 1)).toBeLessThan(0.39);
        steadied += (ratio - 1) ** 2;
        plain += (Math.sqrt(sum) / designDeviations[knot] - 1) ** 2;
      }
    }
    expect(Math.sqrt(plain / (STUDIES * grid.size))).toBeLessThan(0.14);
    expect(steadied).toBeLessThan(0.8 * plain);
  });
});
