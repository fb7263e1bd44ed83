import { describe, expect, it } from 'vitest';
import { describeRecording } from '../../src/momenta/describeRecording.js';
import { makeTrack, makeTracks } from '../support/makeTracks.js';

describe('what was recorded', () => {
  it('is counted: lengths, durations, gaps and missing frames', () => {
    const recording = describeRecording(
      makeTracks(
        [
          makeTrack([0, 1, null, null, 2, 3], 0.5),
          makeTrack([0, 1, null, 3], 0.5),
          makeTrack([0, 1, 2, 3, 4], 0.5),
        ],
        0.5,
      ),
    );
    expect(recording).toEqual({
      tracks: 3,
      positions: 12,
      trackLengths: { least: 3, lowerQuartile: 3.5, median: 4, upperQuartile: 4.5, most: 5 },
      trackDurations: { least: 1.5, lowerQuartile: 1.75, median: 2, upperQuartile: 2.25, most: 2.5 },
      duration: 2.5,
      gaps: 2,
      missingFrames: 3,
      longestGap: 2,
      unevenSteps: 0,
      steps: 9,
    });
  });

  it('knows a step that is no whole number of frames from a gap', () => {
    const recording = describeRecording(
      makeTracks([
        [
          [0, 0],
          [1.005, 1], // within 1 %
          [2.4, 2],
          [5.4, 3],
        ],
      ]),
    );
    expect(recording).toMatchObject({ unevenSteps: 1, gaps: 1, missingFrames: 2, longestGap: 2 });
  });

  it('copes with a track of one position', () => {
    expect(describeRecording(makeTracks([[[3, 7]]]))).toMatchObject({ positions: 1, steps: 0, duration: 0 });
  });
});
