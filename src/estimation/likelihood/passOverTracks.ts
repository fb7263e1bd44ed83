import { countTracks, type TrackSet } from '../../tracks/TrackSet.js';
import { readErrorVariances } from './errorVariances.js';
import type { LikelihoodLayout } from './layout.js';
import type { PassSetting, PathObserver, PathPass } from './PathPass.js';

/** The two halves of a pass over the rows `start` (included) to `end` (excluded) of a track. */
export interface TrackPass {
  /** Least number of positions a track needs to count. */
  readonly fewest: number;
  /** Length d, filled before every run: localization error variances that hold for all positions alike. */
  readonly errorVariance: Float64Array;
  /** Goes before the first track of every run. */
  prepare(parameters: Float64Array): void;
  /** Log-likelihood of the track. */
  filter(parameters: Float64Array, start: number, end: number, observer: PathObserver | undefined): number;
  smooth(
    parameters: Float64Array,
    start: number,
    end: number,
    scores: Float64Array | null,
    observer: PathObserver | undefined,
  ): void;
}

/** A pass that takes one track after the other, back again where scores or smoothed states are wanted. */
export function passOverTracks(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
  { fewest, errorVariance, prepare, filter, smooth }: TrackPass,
): PathPass {
  return {
    run(parameters, scores, observer) {
      scores?.fill(0);
      readErrorVariances(layout, setting, parameters, errorVariance);
      prepare(parameters);
      let logLikelihood = 0;
      for (let track = 0; track < countTracks(tracks); track++) {
        const start = tracks.trackOffsets[track];
        const end = tracks.trackOffsets[track + 1];
        if (end - start < fewest) continue;
        logLikelihood += filter(parameters, start, end, observer);
        if (scores || observer?.velocities || observer?.places)
          smooth(parameters, start, end, scores, observer);
      }
      return logLikelihood;
    },
  };
}
