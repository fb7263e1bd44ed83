/** felt-table: pucks gliding, one at a time, over an air-cushion table with a strip of felt. */

import { randomStream } from '../src/numerics/random/RandomStream.js';
import { type DataSet, formatDecimals, type RecordedPosition } from './DataSet.js';
import { advanceSecondOrder, type MovingState } from './stepping.js';
import { FELT_TABLE } from './truth.js';

const SEED = 20;
const FRAMES = 700;
const INTERVAL = 0.05; // s
const SUBSTEPS = 200;
const WARM_UP_FRAMES = 2000; // 100 s: five times the slowest relaxation, friction/bowl = 20 s on the felt
const LOCALIZATION_ERROR = 6e-4; // m

export const feltTable: DataSet = {
  name: 'felt-table',
  title: 'Pucks on an air-cushion table with a felt strip',
  description:
    'Sixty recordings of a single light puck on an air-cushion table, seen by a camera from above. A strip of felt ' +
    'lies along x = 0.05 m, the table is slightly bowl-shaped, a fan near (-0.2, 0.05) m stirs the air in a circle, ' +
    'and the air jets that agitate the puck are stronger towards positive y. Simulated; the apparatus is invented.',
  question:
    'Where is the felt and how much does it brake, is the force on the puck that of a bowl alone or does something ' +
    'stir, and where are the jets strongest?',
  seed: SEED,
  trackCount: 60,
  substeps: SUBSTEPS,
  recording: { interval: INTERVAL, frames: FRAMES, localizationError: LOCALIZATION_ERROR },
  delimiter: ',',
  comments: [],
  columns: [
    { name: 'track', type: 'integer', description: 'number of the recording' },
    { name: 'time', type: 'number', unit: 's', description: 'time since the recording began' },
    { name: 'x', type: 'number', unit: 'm', description: 'position across the felt strip' },
    { name: 'y', type: 'number', unit: 'm', description: 'position along the felt strip' },
  ],
  rowOrder: 'tracks',
  truth: FELT_TABLE,
  study: { units: { length: 'm', time: 's' } },

  simulateTrack(track) {
    const motion = randomStream(SEED, 'felt-table motion', track);
    const camera = randomStream(SEED, 'felt-table camera', track);
    const state: MovingState = {
      place: [0.2 * motion.normal(), 0.2 * motion.normal()],
      velocity: [0.1 * motion.normal(), 0.1 * motion.normal()],
    };
    advanceSecondOrder(FELT_TABLE, state, WARM_UP_FRAMES * INTERVAL, WARM_UP_FRAMES * SUBSTEPS, motion);
    const positions: RecordedPosition[] = [];
    for (let frame = 0; frame < FRAMES; frame++) {
      if (frame > 0) advanceSecondOrder(FELT_TABLE, state, INTERVAL, SUBSTEPS, motion);
      positions.push({
        track,
        frame,
        place: state.place.map((value) => value + LOCALIZATION_ERROR * camera.normal()),
      });
    }
    return positions;
  },

  formatRow: ({ track, frame, place }) => [
    String(track),
    formatDecimals(frame * INTERVAL, 2),
    ...place.map((value) => formatDecimals(value, 5)),
  ],
};
