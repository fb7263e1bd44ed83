/** stripe-cells: cells crawling on a floor printed with adhesive stripes. */

import { randomStream } from '../src/numerics/random/RandomStream.js';
import { type DataSet, formatDecimals, type RecordedPosition } from './DataSet.js';
import { advanceSecondOrder, type MovingState } from './stepping.js';
import { STRIPE_CELLS } from './truth.js';

const SEED = 40;
const FRAMES = 480; // 48 h of film
const LATEST_ENTRY = 120; // frame by which every cell has entered the film
const INTERVAL = 0.1; // h
const SUBSTEPS = 200;
const WARM_UP_FRAMES = 400; // 40 h: many times the relaxation across the stripes
const LOCALIZATION_ERROR = 0.36; // µm
const PERIOD = 40; // µm
const GAP_CHANCE = 0.055; // chance per recorded frame that a gap follows
const LONGEST_GAP = 3; // frames; short enough that a cell never crosses half a period unseen

export const stripeCells: DataSet = {
  name: 'stripe-cells',
  title: 'Cells crawling on adhesive stripes',
  description:
    'Eighty cells filmed every six minutes for up to two days on a floor printed with adhesive stripes along x that ' +
    'repeat every 40 µm along y. Position across the stripes is recorded within one period (0 to 40 µm, stripe in the ' +
    'middle). Cells keep their heading for half an hour on the stripes and for an hour between them, are pulled ' +
    'towards the stripes, enter the film at different frames, and are lost in about one frame of ten. Simulated; the ' +
    'cells are invented.',
  question:
    'Do the stripes hold the cells by a force, by friction, or by both, and is their drive the same everywhere?',
  seed: SEED,
  trackCount: 80,
  substeps: SUBSTEPS,
  recording: { interval: INTERVAL, frames: FRAMES, localizationError: LOCALIZATION_ERROR, lostFrames: 0.1 },
  delimiter: ',',
  comments: ['cells on stripes, one frame every 6 min', 'y is the place within one period of 40 micrometres'],
  columns: [
    { name: 'track', type: 'integer', description: 'number of the cell' },
    { name: 'frame', type: 'integer', description: 'frame number; one frame is 0.1 h' },
    { name: 'x', type: 'number', unit: 'µm', description: 'position along the stripes' },
    { name: 'y', type: 'number', unit: 'µm', description: 'position across the stripes, within one period' },
  ],
  rowOrder: 'frames',
  truth: STRIPE_CELLS,
  study: {
    interval: INTERVAL,
    period: [0, PERIOD],
    units: { length: 'µm', time: 'h' },
    // along the stripes nothing changes, so waves across them say all there is to say
    force: 'waves:2',
    friction: 'waves:2',
    noise: 'waves:2',
  },

  simulateTrack(track) {
    const motion = randomStream(SEED, 'stripe-cells motion', track);
    const camera = randomStream(SEED, 'stripe-cells camera', track);
    const state: MovingState = {
      place: [0, PERIOD * motion.uniform()],
      velocity: [12 * motion.normal(), 12 * motion.normal()],
    };
    advanceSecondOrder(STRIPE_CELLS, state, WARM_UP_FRAMES * INTERVAL, WARM_UP_FRAMES * SUBSTEPS, motion);
    state.place[0] = 300 * (motion.uniform() - 0.5);
    const positions: RecordedPosition[] = [];
    let lost = 0;
    for (let frame = motion.integer(LATEST_ENTRY + 1); frame < FRAMES; frame++) {
      if (positions.length > 0) advanceSecondOrder(STRIPE_CELLS, state, INTERVAL, SUBSTEPS, motion);
      if (lost > 0) {
        lost--;
        continue;
      }
      positions.push({
        track,
        frame,
        place: state.place.map((value) => value + LOCALIZATION_ERROR * camera.normal()),
      });
      if (camera.uniform() < GAP_CHANCE) lost = 1 + camera.integer(LONGEST_GAP);
    }
    return positions;
  },

  formatRow: ({ track, frame, place }) => [
    String(track),
    String(frame),
    formatDecimals(place[0], 2),
    formatDecimals(wrapRounded(place[1]), 2),
  ],
};

/** The place within one period, wrapped after rounding to the two decimals printed, so that 40.00 never appears. */
function wrapRounded(y: number): number {
  const hundredths = Math.round(y * 100) % (100 * PERIOD);
  return (hundredths < 0 ? hundredths + 100 * PERIOD : hundredths) / 100;
}
