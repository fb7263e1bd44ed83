import { describe, expect, it } from 'vitest';
import { studySchema, type StudyInput } from '../../../src/documents/Study.js';
import { templateModel } from '../../../src/estimation/differences/estimateDifferences.js';
import { createFirstOrderPass } from '../../../src/estimation/likelihood/firstOrderPass.js';
import { createJointPass } from '../../../src/estimation/likelihood/joint/jointPass.js';
import { layOutLikelihood, type LikelihoodLayout } from '../../../src/estimation/likelihood/layout.js';
import type { PassSetting, PathPass } from '../../../src/estimation/likelihood/PathPass.js';
import { withLogLinks } from '../../../src/estimation/likelihood/positiveLinks.js';
import { createSecondOrderPass } from '../../../src/estimation/likelihood/secondOrderPass.js';
import { planEstimation } from '../../../src/estimation/planEstimation.js';
import { randomStream } from '../../../src/numerics/random/RandomStream.js';
import { countPositions, type TrackSet } from '../../../src/tracks/TrackSet.js';
import { describeVisited } from '../../../src/tracks/visitedRegion.js';
import { CONSTANT } from '../../support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrderPaths } from '../../support/exactProcesses.js';

type Order = 'first' | 'second';

interface Prepared {
  readonly plain: PathPass;
  readonly joint: PathPass;
  readonly layout: LikelihoodLayout;
  readonly parameters: Float64Array;
}

function prepare(tracks: TrackSet, order: Order, study: StudyInput, exposure = 0): Prepared {
  const plan = planEstimation(tracks, studySchema.parse(study), order, null, describeVisited(tracks));
  const model = withLogLinks(templateModel(tracks, plan));
  const layout = layOutLikelihood(model, { force: false, friction: false }, true);
  const setting: PassSetting = {
    blockOfPosition: new Int32Array(countPositions(tracks)),
    blocks: 1,
    knownError: null,
  };
  const plain = (order === 'second' ? createSecondOrderPass : createFirstOrderPass)(tracks, layout, setting);
  const joint = createJointPass(tracks, layout, setting, exposure);
  const stream = randomStream(7, 'parameters');
  const parameters = Float64Array.from({ length: layout.size }, (_, i) =>
    i < layout.force.functionCount * layout.dimensions
      ? 0.05 * stream.normal()
      : -0.8 + 0.2 * stream.normal(),
  );
  return { plain, joint, layout, parameters };
}

const DESIGN = { tracks: 3, frames: 40, dimensions: 2, localizationError: 0.3, lostFrames: 0.1, seed: 5 };

function record(order: Order, dimensions = 2): TrackSet {
  return order === 'second'
    ? simulateSecondOrderPaths({ ...DESIGN, dimensions, friction: 0.4 }).tracks
    : simulateFirstOrder({ ...DESIGN, dimensions, diffusion: 0.5 });
}

const VARYING: StudyInput = {
  force: 'spline:5',
  friction: 'spline:5',
  noise: 'spline:5',
  drift: 'spline:5',
  diffusion: 'spline:5',
};

describe('the joint pass', () => {
  it.each([
    ['first', VARYING],
    ['second', VARYING],
    ['second', { ...VARYING, frictionForm: 'axes', noiseForm: 'axes' }],
  ] as const)('is the plain pass where nothing mixes (%s, %o)', (order, study) => {
    const { plain, joint, layout, parameters } = prepare(record(order), order, study);
    const [a, b] = [new Float64Array(layout.size), new Float64Array(layout.size)];
    expect(Math.abs(joint.run(parameters, a) - plain.run(parameters, b))).toBeLessThan(1e-7);
    // With a slope of the force the plain pass leaves its part of the weights out: a thousandth of the score.
    const size = Math.hypot(...b);
    for (let i = 0; i < layout.size; i++) expect(Math.abs(a[i] - b[i])).toBeLessThan(2e-3 * size);
  });

  it('smooths as the plain pass does', () => {
    const tracks = record('second');
    const { plain, joint, parameters } = prepare(tracks, 'second', CONSTANT);
    const names = ['innovations', 'velocities', 'velocityVariances', 'places', 'placeVariances'] as const;
    const observe = (pass: PathPass): Record<(typeof names)[number], Float64Array> => {
      const observer = Object.fromEntries(
        names.map((name) => [name, new Float64Array(tracks.positions.length)]),
      ) as Record<(typeof names)[number], Float64Array>;
      pass.run(parameters, null, observer);
      return observer;
    };
    const [a, b] = [observe(joint), observe(plain)];
    for (const name of names)
      for (let i = 0; i < a[name].length; i++)
        if (!Number.isNaN(b[name][i])) expect(a[name][i]).toBeCloseTo(b[name][i], 6);
  });

  it.each([
    ['first', 0.6, CONSTANT],
    ['first', 0, { ...CONSTANT, noiseForm: 'matrix' }],
    ['second', 0, { ...CONSTANT, frictionForm: 'matrix', noiseForm: 'matrix' }],
    ['second', 0.5, { ...CONSTANT, frictionForm: 'axes' }],
    ['second', 1, { ...CONSTANT, frictionForm: 'matrix', noiseForm: 'matrix' }],
  ] as const)(
    'has the derivative of its log-likelihood for score (%s, exposure %d, %o)',
    (order, exposure, study) => {
      const { joint, layout, parameters } = prepare(record(order), order, study, exposure);
      const scores = new Float64Array(layout.size);
      joint.run(parameters, scores);
      for (let i = 0; i < layout.size; i++) {
        const at = (step: number) =>
          joint.run(
            parameters.map((v, j) => (j === i ? v + step : v)),
            null,
          );
        const slope = (at(1e-5) - at(-1e-5)) / 2e-5;
        expect(Math.abs(scores[i] - slope)).toBeLessThan(1e-5 * Math.max(1, Math.abs(slope)));
      }
    },
  );

  it('mixes axes as turned coordinates do', () => {
    // A process whose axes are separate, looked at from coordinates turned by an angle.
    const tracks = record('second');
    const [c, s] = [Math.cos(0.5), Math.sin(0.5)];
    const turned: TrackSet = {
      ...tracks,
      positions: tracks.positions.map((_, i, all) =>
        i % 2 === 0 ? c * all[i] - s * all[i + 1] : s * all[i - 1] + c * all[i],
      ),
    };
    const axes = prepare(tracks, 'second', { ...CONSTANT, frictionForm: 'axes', noiseForm: 'axes' });
    const full = prepare(turned, 'second', { ...CONSTANT, frictionForm: 'matrix', noiseForm: 'matrix' });
    const [g, n, e] = [[-0.9, -0.3], [-0.5, -1.1], Math.log(0.09)];
    const turn = ([a, b]: number[]): number[] => [
      c * c * a + s * s * b,
      c * s * (a - b),
      s * s * a + c * c * b,
    ];
    const [g0, g1, g2] = turn(g);
    const plain = axes.plain.run(Float64Array.of(0.1, -0.2, ...g, ...n, e, e), null);
    const force = [c * 0.1 + s * 0.2, s * 0.1 - c * 0.2];
    const joint = full.joint.run(Float64Array.of(...force, g0, g1, g1, g2, ...turn(n), e, e), null);
    // The diffuse starts along the axes differ when turned: a part in ten thousand of the start counts for nothing.
    expect(Math.abs(joint - plain)).toBeLessThan(1e-4);
  });
});
