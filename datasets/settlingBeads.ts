/** settling-beads: heights of colloidal beads that sediment onto a floor and hover above it. */

import { randomStream } from '../src/numerics/random/RandomStream.js';
import { type DataSet, formatDecimals, type RecordedPosition } from './DataSet.js';
import { advanceFirstOrder } from './stepping.js';
import { SETTLING_BEADS } from './truth.js';

const SEED = 30;
const FRAMES = 1000;
const INTERVAL = 0.05; // s
const SUBSTEPS = 200;
const WARM_UP = 1000; // s: nine times 4 scale²/diffusion, the slowest relaxation of sedimentation at the usual height
const WARM_UP_STEP = 1e-3; // s: four times the recorded substep, still 1/100 of the fastest relaxation
const LOCALIZATION_ERROR = 2e-8; // m
const START = 2e-6; // m

export const settlingBeads: DataSet = {
  name: 'settling-beads',
  title: 'Heights of beads sedimenting onto a floor',
  description:
    'Forty colloidal beads of 1.5 µm radius in water, nearly of the density of water, hover above a charged glass ' +
    'floor: their weight pulls them down over a height of 1.5 µm per thermal energy, and electrostatic repulsion of ' +
    '0.2 µm range keeps them off the floor. The height is the gap between bead and floor. Moving fluid through that ' +
    'gap hinders diffusion near the floor. Simulated; the laboratory is invented.',
  question:
    'How does diffusion fall towards the floor, and does the drift agree with weight and repulsion at one temperature?',
  seed: SEED,
  trackCount: 40,
  substeps: SUBSTEPS,
  recording: { interval: INTERVAL, frames: FRAMES, localizationError: LOCALIZATION_ERROR },
  delimiter: ';',
  comments: [],
  columns: [
    { name: 'bead', type: 'integer', description: 'number of the bead' },
    {
      name: 'clock_s',
      type: 'number',
      decimalChar: ',',
      unit: 's',
      description: 'time since the film began',
    },
    {
      name: 'height_m',
      type: 'number',
      decimalChar: ',',
      unit: 'm',
      description: 'gap between bead and floor',
    },
  ],
  rowOrder: 'tracks',
  truth: SETTLING_BEADS,
  study: {
    columns: { track: 'bead', time: 'clock_s', x: 'height_m' },
    units: { length: 'm', time: 's' },
  },

  simulateTrack(track) {
    const motion = randomStream(SEED, 'settling-beads motion', track);
    const camera = randomStream(SEED, 'settling-beads camera', track);
    let height = advanceFirstOrder(
      SETTLING_BEADS,
      START,
      WARM_UP,
      Math.round(WARM_UP / WARM_UP_STEP),
      motion,
    );
    const positions: RecordedPosition[] = [];
    for (let frame = 0; frame < FRAMES; frame++) {
      if (frame > 0) height = advanceFirstOrder(SETTLING_BEADS, height, INTERVAL, SUBSTEPS, motion);
      positions.push({ track, frame, place: [height + LOCALIZATION_ERROR * camera.normal()] });
    }
    return positions;
  },

  formatRow: ({ track, frame, place }) => [
    String(track),
    formatDecimals(frame * INTERVAL, 2).replace('.', ','),
    place[0].toExponential(4).replace('.', ','),
  ],
};
