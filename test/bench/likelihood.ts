/**
 * Nanoseconds per position and axis of the filter of the second-order likelihood, alone and with its adjoint, beside the
 * same loop in C++ where a compiler is at hand; and the time of whole fits. Run with `npm run bench:likelihood`. Of
 * many runs the least processor time is shown, so that a busy machine disturbs little.
 */

import { execFileSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { studySchema } from '../../src/documents/Study.js';
import { templateModel } from '../../src/estimation/differences/estimateDifferences.js';
import { layOutLikelihood } from '../../src/estimation/likelihood/layout.js';
import { withLogLinks } from '../../src/estimation/likelihood/positiveLinks.js';
import { createSecondOrderPass } from '../../src/estimation/likelihood/secondOrderPass.js';
import { findStart } from '../../src/estimation/likelihood/startValues.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import { fitTracks } from '../../src/fit.js';
import { countPositions } from '../../src/tracks/TrackSet.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';
import { bumpCase, simulateCase, stirCase, type VariedCase } from '../support/variedCases.js';
import { printTable } from '../studies/table.js';

const REPEATS = 30;

/** Best times of the filter and of both, nanoseconds per position and axis. */
function timePass(given: VariedCase): { filter: number; both: number } {
  const tracks = simulateCase(given, 1);
  const plan = planEstimation(
    tracks,
    studySchema.parse(given.study),
    'second',
    given.relaxationTime,
    describeVisited(tracks),
  );
  const layout = layOutLikelihood(
    withLogLinks(templateModel(tracks, plan)),
    { force: false, friction: false },
    true,
  );
  const { ofPosition, count } = plan.blocks;
  const pass = createSecondOrderPass(tracks, layout, {
    blockOfPosition: ofPosition,
    blocks: count,
    knownError: null,
  });
  const parameters = findStart(tracks, plan, layout, new Float64Array(given.dimensions).fill(1e-6));
  const scores = new Float64Array(layout.size * count);
  const size = countPositions(tracks) * given.dimensions;
  const time = (wanted: Float64Array | null): number => {
    const start = process.cpuUsage();
    pass.run(parameters, wanted);
    return (process.cpuUsage(start).user * 1000) / size;
  };
  let [filter, both] = [Infinity, Infinity];
  for (let i = 0; i < REPEATS; i++) {
    filter = Math.min(filter, time(null));
    both = Math.min(both, time(scores));
  }
  return { filter, both };
}

function timeLoop(): { filter: number; both: number } | null {
  const folder = mkdtempSync(join(tmpdir(), 'wanderlaw-bench-'));
  try {
    const program = join(folder, 'filterLoop');
    const source = fileURLToPath(new URL('filterLoop.cpp', import.meta.url));
    execFileSync('g++', ['-O3', '-march=native', source, '-o', program], { stdio: 'ignore' });
    const [filter, both] = execFileSync(program, { encoding: 'utf8' }).split(' ').map(Number);
    return { filter, both };
  } catch {
    return null; // no compiler
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

const loop = timeLoop();
const rows = [bumpCase(0.1), stirCase(0)].map((given) => {
  const { filter, both } = timePass(given);
  const ratio = (own: number, other: number | undefined): string =>
    given.dimensions === 1 && other ? (own / other).toFixed(1) : '–';
  return [
    given.title,
    filter.toFixed(0),
    ratio(filter, loop?.filter),
    both.toFixed(0),
    ratio(both, loop?.both),
  ];
});
if (loop) rows.push(['C++ -O3, one dimension', loop.filter.toFixed(0), '1', loop.both.toFixed(0), '1']);
printTable(
  'Likelihood pass, nanoseconds per position and axis',
  ['case', 'filter', 'ratio to C++', 'filter and adjoint', 'ratio to C++'],
  rows,
);

const fits: string[][] = [];
for (const given of [bumpCase(0.1), stirCase(0)]) {
  const tracks = simulateCase(given, 1);
  const start = performance.now();
  const spent = process.cpuUsage();
  await fitTracks(tracks, studySchema.parse({ ...given.study, order: given.order }));
  const { user } = process.cpuUsage(spent);
  fits.push([
    given.title,
    String(countPositions(tracks)),
    ((performance.now() - start) / 1000).toFixed(1),
    (user / 1e6).toFixed(1),
  ]);
}
printTable(
  'Likelihood fits, uncertainty included',
  ['case', 'positions', 'seconds', 'processor seconds'],
  fits,
);
